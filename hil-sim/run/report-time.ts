/** Time: every error over the run, each vehicle with its mark, limits as lines, numbers in words below. */
import * as Plot from '@observablehq/plot';
import { clock, figure } from './figures.ts';
import { MEASURES, type MeasureName, type VehicleMeasures } from './measures.ts';
import { drawing, figureOf, html } from './report-html.ts';
import { markOf, markPicture } from './report-marks.ts';
import type { ReportInput } from './report.ts';

const WIDTH = 520;
const HEIGHT = 230;
const INK = 'var(--ink)';
const MARKS_A_LINE = 7;

interface Point {
  readonly h: number;
  readonly v: number;
}

interface Lines {
  readonly heading: string;
  readonly label: string;
  /** By vehicle × bins. */
  readonly values: Float64Array;
  readonly scale?: number;
  /** Level lines with their words. */
  readonly levels?: readonly { readonly at: number; readonly words: string }[];
  /** A line of the whole fleet: its values and the seconds between them. */
  readonly fleet?: { readonly values: Float64Array; readonly stepS: number };
  readonly domain?: [number, number];
  readonly reverse?: boolean;
  /** Without the line of forming up. */
  readonly isState?: boolean;
  readonly caption: string;
}

export function timeSection(input: ReportInput): string {
  const { report, trial } = input;
  const { binned, sampled } = report.series;
  const { limits } = trial;
  const level = (limit: number | undefined, what: string, unit: string): { at: number; words: string }[] =>
    limit === undefined
      ? []
      : [{ at: unit === '' ? 100 * limit : limit, words: `${what}: at most ${figure(limit, unit)}` }];
  const plots: Lines[] = [
    {
      heading: 'Distance from the loop',
      label: 'm',
      values: binned.crossTrack,
      levels: [...level(limits.crossTrackRms, 'rms', 'm'), ...level(limits.crossTrackMax, 'greatest', 'm')],
      caption: `${rmsWords(input, 'crossTrackRms')}; greatest ${valueWords(input, 'crossTrackMax')}.`,
    },
    {
      heading: 'Gap error over target gap',
      label: '%',
      values: binned.gap,
      scale: 100,
      levels: level(limits.gapRms, 'rms', ''),
      caption: `${rmsWords(input, 'gapRms')}.`,
    },
    {
      heading: 'Error of the stated current',
      label: 'm/s',
      values: binned.current,
      levels: level(limits.currentRms, 'rms', 'm/s'),
      fleet: { values: report.maps.errorMps, stepS: 60 },
      caption:
        `At the own place: ${rmsWords(input, 'currentRms')}. Heavy line, maps round the whole loop: ` +
        `${rmsWords(input, 'mapRms')}; spread between maps ${valueWords(input, 'mapSpread')}.`,
    },
    {
      heading: 'Error of the stated position',
      label: 'm',
      values: binned.position,
      levels: level(limits.positionRms, 'rms', 'm'),
      caption: `${rmsWords(input, 'positionRms')}.`,
    },
    {
      heading: 'Depth',
      label: 'm below the surface',
      values: sampled.depth,
      reverse: true,
      isState: true,
      levels: [{ at: trial.mission.depth, words: 'depth of the loop' }],
      caption: `Closest to each other within 5 m of depth: ${valueWords(input, 'separationMin')}.`,
    },
    {
      heading: 'Charge left',
      label: '%',
      values: sampled.battery,
      scale: 100,
      domain: [0, 100],
      isState: true,
      caption:
        `Energy used by the fleet: ${figure(report.values.energy_Wh, 'Wh')}, ` +
        `most by ${html(report.worst.energy_Wh.vehicle!)}.`,
    },
  ];
  const formUp = report.values.formUp_s;
  const since =
    formUp === null
      ? 'The fleet never formed up, so nothing counted.'
      : `Measures count from ${clock(formUp)}, where the fleet formed up.`;
  const legend = trial.fleet.vehicles
    .map((vehicle, index) => `<li>${markPicture(index)}${html(vehicle.name)}</li>`)
    .join('');
  return (
    '<h2>Time</h2>' +
    `<p class="says">Errors are the root mean square in each ${report.series.binS} s. ` +
    `${since} ` +
    'Where a line leaves a plot at the top, the approach went on above it.</p>' +
    `<ul class="legend">${legend}</ul><div class="pair">` +
    plots.map((lines) => figureOf(lines.heading, linesPlot(input, lines), lines.caption)).join('') +
    deliveryFigure(input) +
    '</div>'
  );
}

function valueWords({ report }: ReportInput, name: MeasureName): string {
  const { vehicle, at_s, with: other } = report.worst[name];
  const who =
    vehicle === null || report.values[name] === null
      ? ''
      : ` (${html(other === undefined ? vehicle : `${vehicle} and ${other}`)}` +
        `${at_s === null ? '' : ` at ${clock(at_s)}`})`;
  return `${figure(report.values[name], MEASURES[name].unit)}${who}`;
}

/** The fleet's rms and the worst vehicle's own. */
function rmsWords({ report }: ReportInput, name: MeasureName & keyof VehicleMeasures): string {
  const { vehicle } = report.worst[name];
  const { unit } = MEASURES[name];
  const own = report.vehicles.find((one) => one.vehicle === vehicle)?.[name] ?? null;
  const fleet = `rms ${figure(report.values[name], unit)}`;
  return own === null ? fleet : `${fleet}, worst ${html(vehicle!)} ${figure(own, unit)}`;
}

function pointsOf(
  values: Float64Array,
  first: number,
  count: number,
  of: { stepS: number; middleS: number; scale: number },
): Point[] {
  return Array.from({ length: count }, (_, bin) => ({
    h: (bin * of.stepS + of.middleS) / 3600,
    v: values[first + bin]! * of.scale,
  }));
}

/** The top of a plot: what counts and the levels fit in, the approach may not. */
function topOf(input: ReportInput, lines: Lines): number {
  const { series, values: measured } = input.report;
  const fromBin = measured.formUp_s === null ? 0 : Math.floor(measured.formUp_s / series.binS);
  let top = 0;
  for (let at = 0; at < lines.values.length; at++) {
    if (at % series.bins >= fromBin && lines.values[at]! > top) top = lines.values[at]!;
  }
  top *= lines.scale ?? 1;
  for (const { at } of lines.levels ?? []) top = Math.max(top, Math.min(at, 4 * top || at));
  return top > 0 ? 1.1 * top : 1;
}

function frame(
  input: ReportInput,
  lines: { label: string; domain: [number, number]; reverse?: boolean },
): Plot.PlotOptions {
  return {
    width: WIDTH,
    height: HEIGHT,
    marginLeft: 48,
    marginRight: 8,
    marginTop: 24,
    marginBottom: 36,
    style: { fontSize: '13px', background: 'none', color: INK },
    x: {
      domain: [0, Math.max(input.report.lastS, 60) / 3600],
      label: 'time, h',
      labelArrow: 'none',
      labelAnchor: 'center',
      ticks: 7,
    },
    y: {
      domain: lines.domain,
      label: lines.label,
      labelArrow: 'none',
      ticks: 5,
      grid: true,
      reverse: lines.reverse ?? false,
    },
  };
}

/** The moment of forming up, as a line with its words. */
function formedUpMarks({ report }: ReportInput): Plot.Markish[] {
  const at_s = report.values.formUp_s;
  if (at_s === null || at_s === 0) return [];
  return [
    Plot.ruleX([at_s / 3600], { stroke: INK, strokeWidth: 1, strokeDasharray: '2 2' }),
    Plot.text([at_s / 3600], {
      x: (h: number) => h,
      frameAnchor: 'top',
      text: () => 'formed up',
      dx: 4,
      dy: 2,
      textAnchor: 'start',
      fill: INK,
      stroke: 'var(--paper)',
      strokeWidth: 4,
    }),
  ];
}

function linesPlot(input: ReportInput, lines: Lines): string {
  const { series } = input.report;
  const top = lines.domain?.[1] ?? topOf(input, lines);
  const domain: [number, number] = lines.domain ?? [0, top];
  const isIn = (point: Point): boolean => point.v >= domain[0] && point.v <= domain[1];
  const at = { x: 'h', y: 'v' };
  const vehicles = input.trial.fleet.vehicles.flatMap((_vehicle, index) => {
    const mark = markOf(index);
    const points = pointsOf(lines.values, index * series.bins, series.bins, {
      stepS: series.binS,
      middleS: series.binS / 2,
      scale: lines.scale ?? 1,
    });
    const stride = Math.max(1, Math.round(series.bins / MARKS_A_LINE));
    const offset = Math.floor((stride * (index + 0.5)) / input.trial.fleet.vehicles.length);
    return [
      Plot.line(points, { ...at, stroke: mark.colour, strokeWidth: 1.3, clip: true }),
      Plot.dot(
        points.filter((point, bin) => bin % stride === offset && isIn(point)),
        {
          ...at,
          symbol: mark.symbol as never,
          r: 4,
          stroke: mark.colour,
          fill: mark.isHollow ? 'var(--paper)' : mark.colour,
        },
      ),
    ];
  });
  const fleet =
    lines.fleet === undefined
      ? []
      : [
          Plot.line(
            pointsOf(lines.fleet.values, 0, lines.fleet.values.length, {
              stepS: lines.fleet.stepS,
              middleS: 0,
              scale: lines.scale ?? 1,
            }),
            { ...at, stroke: INK, strokeWidth: 2.6, clip: true },
          ),
        ];
  const levels = (lines.levels ?? [])
    .filter((level) => level.at <= top)
    .flatMap((level) => [
      Plot.ruleY([level.at], { stroke: INK, strokeWidth: 1.2 }),
      Plot.text([level.at], {
        y: (v: number) => v,
        frameAnchor: 'right',
        text: () => level.words,
        dy: -7,
        dx: -2,
        textAnchor: 'end',
        fill: INK,
        stroke: 'var(--paper)',
        strokeWidth: 4,
      }),
    ]);
  return drawing(`${lines.heading} over time, ${lines.label}`, {
    ...frame(input, { label: lines.label, domain, reverse: lines.reverse ?? false }),
    marks: [...vehicles, ...fleet, ...(lines.isState === true ? [] : formedUpMarks(input)), ...levels],
  });
}

function deliveryFigure(input: ReportInput): string {
  const { series, values } = input.report;
  const points = pointsOf(series.offered, 0, series.bins, {
    stepS: series.binS,
    middleS: series.binS / 2,
    scale: 1,
  }).map(({ h, v }, bin) => ({ h, v: v === 0 ? NaN : (100 * series.heard[bin]!) / v }));
  const svg = drawing('Share of frames heard and used over time, %', {
    ...frame(input, { label: '%', domain: [0, 100] }),
    marks: [
      Plot.line(points, { x: 'h', y: 'v', stroke: INK, strokeWidth: 1.3, curve: 'step' }),
      ...formedUpMarks(input),
    ],
  });
  return figureOf(
    'Frames heard and used',
    svg,
    `${figure(values.framesSent, 'frames')} said; heard and used ${valueWords(input, 'deliveryRatio')} ` +
      'of frames times hearers, repeats left out.',
  );
}
