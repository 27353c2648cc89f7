/** Plots over time: lines of vehicles with their marks, levels with their words, the moment of forming up. */
import * as Plot from '@observablehq/plot';
import { drawing } from './report-html.ts';
import { markOf } from './report-marks.ts';
import type { ReportInput } from './report-input.ts';
import { scriptSpans, scriptWords } from './report-script.ts';

const WIDTH = 520;
const HEIGHT = 230;
const INK = 'var(--ink)';
const MARKS_A_LINE = 7;
const AT = { x: 'h', y: 'v' } as const;
/** Words over lines: a rim of paper keeps them readable. */
const WORDS = { fill: INK, stroke: 'var(--paper)', strokeWidth: 4 } as const;

interface Point {
  readonly h: number;
  readonly v: number;
}

/** One plot: what it draws and what is said below it. */
export interface Lines {
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
      ...WORDS,
      x: (h: number) => h,
      frameAnchor: 'top',
      text: () => 'formed up',
      dx: 4,
      dy: 2,
      textAnchor: 'start',
    }),
  ];
}

/** The lines of all vehicles over time, with their marks, the fleet's own line and the levels. */
export function linesPlot(input: ReportInput, lines: Lines): string {
  const top = lines.domain?.[1] ?? topOf(input, lines);
  const domain: [number, number] = lines.domain ?? [0, top];
  return drawing(`${lines.heading} over time, ${lines.label}`, {
    ...frame(input, { label: lines.label, domain, reverse: lines.reverse ?? false }),
    marks: [
      ...scriptSpans(input),
      ...input.trial.fleet.vehicles.flatMap((_vehicle, index) =>
        vehicleMarks(input, lines, { index, domain }),
      ),
      ...fleetMarks(lines),
      ...(lines.isState === true ? [] : formedUpMarks(input)),
      ...levelMarks(lines, top),
      ...scriptWords(input),
    ],
  });
}

/** One vehicle's line, and its mark at some places of it, another vehicle's at others. */
function vehicleMarks(
  { report, trial }: ReportInput,
  lines: Lines,
  { index, domain }: { index: number; domain: [number, number] },
): Plot.Markish[] {
  const { series } = report;
  const mark = markOf(index);
  const points = pointsOf(lines.values, index * series.bins, series.bins, {
    stepS: series.binS,
    middleS: series.binS / 2,
    scale: lines.scale ?? 1,
  });
  const stride = Math.max(1, Math.round(series.bins / MARKS_A_LINE));
  const offset = Math.floor((stride * (index + 0.5)) / trial.fleet.vehicles.length);
  const marked = points.filter(({ v }, bin) => bin % stride === offset && v >= domain[0] && v <= domain[1]);
  const fill = mark.isHollow ? 'var(--paper)' : mark.colour;
  return [
    Plot.line(points, { ...AT, stroke: mark.colour, strokeWidth: 1.3, clip: true }),
    Plot.dot(marked, { ...AT, symbol: mark.symbol as never, r: 4, stroke: mark.colour, fill }),
  ];
}

function fleetMarks({ fleet, scale }: Lines): Plot.Markish[] {
  if (fleet === undefined) return [];
  const points = pointsOf(fleet.values, 0, fleet.values.length, {
    stepS: fleet.stepS,
    middleS: 0,
    scale: scale ?? 1,
  });
  return [Plot.line(points, { ...AT, stroke: INK, strokeWidth: 2.6, clip: true })];
}

function levelMarks({ levels }: Lines, top: number): Plot.Markish[] {
  return (levels ?? [])
    .filter((level) => level.at <= top)
    .flatMap((level) => [
      Plot.ruleY([level.at], { stroke: INK, strokeWidth: 1.2 }),
      Plot.text([level.at], {
        ...WORDS,
        y: (v: number) => v,
        frameAnchor: 'right',
        text: () => level.words,
        dy: -7,
        dx: -2,
        textAnchor: 'end',
      }),
    ]);
}

/** Share of frames heard and used, in each bin. */
export function deliveryPlot(input: ReportInput): string {
  const { series } = input.report;
  const points = pointsOf(series.offered, 0, series.bins, {
    stepS: series.binS,
    middleS: series.binS / 2,
    scale: 1,
  }).map(({ h, v }, bin) => ({ h, v: v === 0 ? NaN : (100 * series.heard[bin]!) / v }));
  return drawing('Share of frames heard and used over time, %', {
    ...frame(input, { label: '%', domain: [0, 100] }),
    marks: [
      ...scriptSpans(input),
      Plot.line(points, { ...AT, stroke: INK, strokeWidth: 1.3, curve: 'step' }),
      ...formedUpMarks(input),
      ...scriptWords(input),
    ],
  });
}
