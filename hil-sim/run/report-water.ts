/** The water, seen from above: tracks against the loop, and the current as it was and as it was believed. */
import * as Plot from '@observablehq/plot';
import { clock } from './figures.ts';
import { pictureOf, type MapPoint } from './maps.ts';
import type { MeasureReport } from './measure-report.ts';
import { drawing, figureOf, html, plainTick } from './report-html.ts';
import { markOf, markPicture } from './report-marks.ts';
import type { ReportInput } from './report-input.ts';

const INK = 'var(--ink)';
const LOOP = { stroke: 'var(--ink)', strokeWidth: 5, strokeOpacity: 0.16 } as const;
const LINE = { x: 'e', y: 'n', clip: true } as const;
const POINT_STEP = 4;

interface Point {
  readonly e: number;
  readonly n: number;
}

interface Bounds {
  readonly e: [number, number];
  readonly n: [number, number];
}

export function waterSection(input: ReportInput): string {
  const { report } = input;
  const minutes = mapMinutes(report);
  const pictures = minutes.map((minute) => pictureOf(report.maps, minute, POINT_STEP)!);
  const most = Math.max(0.02, ...pictures.flat().map(longest));
  const currents = minutes
    .map((minute, place) => currentFigure(input, { minute, picture: pictures[place]!, most }))
    .join('');
  return (
    `<h2>Water</h2><div class="lead">${tracksFigure(input)}${keys(input)}</div>` +
    (currents === ''
      ? '<p>No vehicle stated a map, so there is none to compare with the water.</p>'
      : `<div class="trio">${currents}</div>`)
  );
}

/** The loop as drawn: every 16th vertex is enough for the eye. */
function loopPoints({ track }: MeasureReport): Point[] {
  const points: Point[] = [];
  for (let index = 0; index < track.eastM.length; index += 16)
    points.push({ e: track.eastM[index]!, n: track.northM[index]! });
  return points;
}

function trackPoints({ series }: MeasureReport, index: number): Point[] {
  const points: Point[] = [];
  for (let place = index * series.points; place < (index + 1) * series.points; place++) {
    if (!Number.isNaN(series.trackEastM[place]!))
      points.push({ e: series.trackEastM[place]!, n: series.trackNorthM[place]! });
  }
  return points;
}

/** A square about all points, with room round it. */
function boundsOf(points: readonly Point[], room: number): Bounds {
  let [west, east, south, north] = [Infinity, -Infinity, Infinity, -Infinity];
  for (const { e, n } of points) {
    west = Math.min(west, e);
    east = Math.max(east, e);
    south = Math.min(south, n);
    north = Math.max(north, n);
  }
  const half = (Math.max(east - west, north - south) / 2) * (1 + room);
  const e = (west + east) / 2;
  const n = (south + north) / 2;
  return { e: [e - half, e + half], n: [n - half, n + half] };
}

function axes(bounds: Bounds, size: number): Plot.PlotOptions {
  return {
    width: size,
    height: size,
    marginLeft: 56,
    marginBottom: 40,
    marginTop: 26,
    marginRight: 18,
    style: { fontSize: '13px', background: 'none', color: INK },
    x: {
      domain: bounds.e,
      label: 'east of the datum, m',
      labelArrow: 'none',
      labelAnchor: 'center',
      ticks: 5,
      tickFormat: plainTick,
    },
    y: {
      domain: bounds.n,
      label: 'north of the datum, m',
      labelArrow: 'none',
      ticks: 5,
      tickFormat: plainTick,
    },
  };
}

function circle(centre: { east: number; north: number }, radiusM: number): Point[] {
  return Array.from({ length: 121 }, (_, corner) => ({
    e: centre.east + radiusM * Math.sin((2 * Math.PI * corner) / 120),
    n: centre.north + radiusM * Math.cos((2 * Math.PI * corner) / 120),
  }));
}

function tracksFigure({ trial, report }: ReportInput): string {
  const { vehicles } = trial.fleet;
  const tracks = vehicles.map((_vehicle, index) => trackPoints(report, index));
  const loop = loopPoints(report);
  const { keepIn, keepOut, recovery } = trial.mission;
  const bounds = boundsOf([...tracks.flat(), ...loop], 0.12);
  const area = (of: (typeof keepOut)[number]): Point[] => circle(of.centre, of.radius);
  const svg = drawing(`Tracks of ${vehicles.length} vehicles about the loop, north up`, {
    ...axes(bounds, 460),
    marks: [
      Plot.line(area(keepIn), { ...LINE, stroke: INK, strokeWidth: 1, strokeDasharray: '1 4' }),
      ...keepOut.map((shape) => Plot.line(area(shape), { ...LINE, stroke: 'var(--lack)', strokeWidth: 2 })),
      Plot.line(loop, { ...LINE, ...LOOP }),
      ...vehicles.flatMap(({ name }, index) => vehicleMarks(tracks[index]!, { name, index, bounds })),
      Plot.text([{ e: recovery.east, n: recovery.north }], {
        ...LINE,
        text: () => '✕ recovery',
        textAnchor: 'start',
        dx: -4,
        fill: INK,
      }),
    ],
  });
  const place = (at: { east: number; north: number }): string =>
    `east ${plainTick(Math.round(at.east))} m, north ${plainTick(Math.round(at.north))} m`;
  return figureOf(
    'Tracks, true positions, north up',
    svg,
    `The loop is ${Math.round(report.track.lengthM)} m long, travelled ${trial.mission.loop.turn}; ` +
      `keep-in is a circle of ${Math.round(keepIn.radius)} m about ${place(keepIn.centre)}; ` +
      `recovery is at ${place(recovery)}.`,
  );
}

/** A vehicle's track, where it began, and where it ended with its name on the side that has room. */
function vehicleMarks(track: Point[], of: { name: string; index: number; bounds: Bounds }): Plot.Markish[] {
  const mark = markOf(of.index);
  const dot = { x: 'e', y: 'n', symbol: mark.symbol as never, stroke: mark.colour, strokeWidth: 1.5 };
  const [west, east] = of.bounds.e;
  const isRight = (track.at(-1)?.e ?? west) > west + 0.8 * (east - west);
  return [
    Plot.line(track, { ...LINE, stroke: mark.colour, strokeWidth: 0.8, strokeOpacity: 0.9 }),
    Plot.dot(track.slice(0, 1), { ...dot, r: 4, fill: 'var(--paper)' }),
    Plot.dot(track.slice(-1), { ...dot, r: 6, fill: mark.isHollow ? 'var(--paper)' : mark.colour }),
    Plot.text(track.slice(-1), {
      x: 'e',
      y: 'n',
      text: () => of.name,
      dx: isRight ? -10 : 10,
      textAnchor: isRight ? 'end' : 'start',
      fill: INK,
      stroke: 'var(--paper)',
      strokeWidth: 4,
    }),
  ];
}

/** What the drawings' lines and marks mean. */
function keys({ trial, report }: ReportInput): string {
  const key = (body: string, words: string): string =>
    `<li><svg class="key" viewBox="0 0 36 12" aria-hidden="true">${body}</svg>${words}</li>`;
  const note = (index: number): string => (report.vehicles[index]!.isExcepted ? ' (not counted)' : '');
  return (
    '<div><ul class="keys">' +
    trial.fleet.vehicles
      .map((vehicle, index) => `<li>${markPicture(index)}${html(vehicle.name)}${note(index)}</li>`)
      .join('') +
    key('<path d="M0,6H36" stroke="var(--ink)" stroke-width="5" stroke-opacity=".2"/>', 'the loop') +
    key('<path d="M0,6H36" stroke="var(--ink)" stroke-dasharray="1 4"/>', 'keep-in') +
    (trial.mission.keepOut.length > 0
      ? key('<path d="M0,6H36" stroke="var(--lack)" stroke-width="2"/>', 'keep-out')
      : '') +
    key(
      '<path d="M0,6H30" stroke="var(--ink)" stroke-width="2"/>' +
        '<path d="M29,2L36,6L29,10Z" fill="var(--ink)"/>',
      'current as the fleet’s maps have it, mean of the vehicles',
    ) +
    key(
      '<path d="M0,6H30" stroke="var(--ink)" stroke-width="1.5" stroke-dasharray="4 3"/>' +
        '<path d="M29,2L36,6L29,10" fill="none" stroke="var(--ink)"/>',
      'true current',
    ) +
    key(
      '<circle cx="18" cy="6" r="6" fill="var(--ink)" fill-opacity=".16"/>',
      'stated standard deviation of the map',
    ) +
    '</ul><p class="says">Small hollow marks are where vehicles began, large ones where they ended. ' +
    'Arrows point where the water flows; each drawing prints its scale.</p></div>'
  );
}

/** The minutes to draw: the first after forming up, the middle and the last that have maps. */
function mapMinutes({ maps, values, lastS }: MeasureReport): number[] {
  const had: number[] = [];
  const fromS = values.formUp_s ?? 0;
  for (let minute = 0; minute < maps.minutes; minute++) {
    if (minute * 60 >= fromS && minute * 60 <= lastS && !Number.isNaN(maps.errorMps[minute]!))
      had.push(minute);
  }
  if (had.length === 0) return [];
  return [...new Set([had[0]!, had[had.length >> 1]!, had[had.length - 1]!])];
}

/** A round speed whose arrow is about as long as the longest. */
function scaleSpeed(most: number): number {
  for (const speed of [2, 1, 0.5, 0.2, 0.1, 0.05, 0.02]) if (speed <= most) return speed;
  return 0.01;
}

/** The faster of truth and belief at a point. */
function longest(point: MapPoint): number {
  return Math.max(
    Math.sqrt(point.trueEastMps ** 2 + point.trueNorthMps ** 2),
    Math.sqrt(point.meanEastMps ** 2 + point.meanNorthMps ** 2),
  );
}

/** One drawing of currents; `most` is the fastest in any of them, so that all have one scale. */
function currentFigure(
  { report }: ReportInput,
  { minute, picture, most }: { minute: number; picture: MapPoint[]; most: number },
): string {
  const loop = loopPoints(report);
  const bounds = boundsOf(loop, 0.75);
  const sideM = bounds.e[1] - bounds.e[0];
  const mPerMps = (0.17 * sideM) / most;
  const speed = scaleSpeed(most);
  const from = { e: bounds.e[0] + 0.05 * sideM, n: bounds.n[0] + 0.06 * sideM };
  const arrow = (kind: 'true' | 'mean') => ({
    x1: 'eastM',
    y1: 'northM',
    stroke: INK,
    headLength: 7,
    x2: (point: MapPoint) =>
      point.eastM + mPerMps * (kind === 'true' ? point.trueEastMps : point.meanEastMps),
    y2: (point: MapPoint) =>
      point.northM + mPerMps * (kind === 'true' ? point.trueNorthMps : point.meanNorthMps),
  });
  const errorMps = report.maps.errorMps[minute]!;
  const spreadMps = report.maps.spreadMps[minute]!;
  const svg = drawing(`Current round the loop at ${clock(minute * 60)}: believed solid, true dashed`, {
    ...axes(bounds, 360),
    marks: [
      Plot.line(loop, { x: 'e', y: 'n', ...LOOP }),
      Plot.geo(
        picture.map((point) => tipCircle(point, mPerMps)),
        { fill: INK, fillOpacity: 0.13, stroke: 'none' },
      ),
      Plot.arrow(picture, { ...arrow('true'), strokeWidth: 1.3, strokeDasharray: '4 3' }),
      Plot.arrow(picture, { ...arrow('mean'), strokeWidth: 1.8 }),
      Plot.arrow([from], {
        x1: 'e',
        y1: 'n',
        x2: from.e + mPerMps * speed,
        y2: 'n',
        stroke: INK,
        strokeWidth: 1.8,
        headLength: 7,
      }),
      Plot.text([from], {
        x: 'e',
        y: 'n',
        text: () => `${speed} m/s`,
        dy: -9,
        textAnchor: 'start',
        fill: INK,
      }),
    ],
  });
  return figureOf(
    `Current at ${clock(minute * 60)}`,
    svg,
    `Maps against truth ${errorMps.toFixed(3)} m/s rms, against each other ${spreadMps.toFixed(3)} m/s; ` +
      `strongest ${Math.max(...picture.map(longest)).toFixed(2)} m/s.`,
  );
}

/** A circle of the stated standard deviation about the tip of a believed arrow, in the plot's own units. */
function tipCircle(point: MapPoint, mPerMps: number): { type: 'Polygon'; coordinates: number[][][] } {
  const tip = {
    east: point.eastM + mPerMps * point.meanEastMps,
    north: point.northM + mPerMps * point.meanNorthMps,
  };
  const ring = circle(tip, mPerMps * point.sigmaMps).filter((_point, corner) => corner % 5 === 0);
  return { type: 'Polygon', coordinates: [ring.map(({ e, n }) => [e, n])] };
}
