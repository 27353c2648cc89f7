/** Several seeds side by side: a line a run, the spread at the end; and a run beside its yardsticks. */
import { figure } from './figures.ts';
import { MEASURES, MEASURE_NAMES, type MeasureName } from './measures.ts';
import type { Outcome } from './outcome.ts';

const SHOWN: readonly MeasureName[] = [
  'formUp_s',
  'crossTrackRms',
  'crossTrackMax',
  'gapRms',
  'separationMin',
  'currentRms',
  'mapRms',
  'positionRms',
  'deliveryRatio',
];
const COLUMN = 15;

const cells = (texts: readonly string[]): string => texts.map((text) => text.padStart(COLUMN)).join('');

/** One run of several. */
export function seedLine(outcome: Outcome): string {
  const values = SHOWN.map((name) => figure(outcome.measures[name] ?? null, MEASURES[name].unit));
  return `seed ${String(outcome.seed).padEnd(6)} ${outcome.verdict}${cells(values)}`;
}

/** Heads, mean, standard deviation, least and greatest of every measure over the runs that have it. */
export function spreadLines(outcomes: readonly Outcome[]): string[] {
  const columns = SHOWN.map((name) =>
    outcomes.map(({ measures }) => measures[name] ?? null).filter((value) => value !== null),
  );
  const row = (of: (values: readonly number[]) => number): string =>
    cells(
      columns.map((values, at) => figure(values.length === 0 ? null : of(values), MEASURES[SHOWN[at]!].unit)),
    );
  const passed = outcomes.filter(({ verdict }) => verdict === 'pass').length;
  return [
    '',
    `                ${cells(SHOWN)}`,
    `mean            ${row(mean)}`,
    `sd              ${row(deviation)}`,
    `least           ${row((values) => Math.min(...values))}`,
    `greatest        ${row((values) => Math.max(...values))}`,
    '',
    `${passed} of ${outcomes.length} pass`,
    ...worstLines(outcomes),
  ];
}

function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

function deviation(values: readonly number[]): number {
  const middle = mean(values);
  return Math.sqrt(
    values.reduce((sum, value) => sum + (value - middle) ** 2, 0) / Math.max(1, values.length - 1),
  );
}

function worstLines(outcomes: readonly Outcome[]): string[] {
  return outcomes.flatMap(({ verdict, seed, why }) =>
    verdict === 'pass' || why === undefined
      ? []
      : [`seed ${seed} fails ${why.firstBreach}; again: ${why.repeat}`],
  );
}

/** The run beside its yardsticks, if it has them. */
export function yardstickLines(outcome: Outcome): string[] {
  const { yardsticks } = outcome;
  if (yardsticks === undefined) return [];
  const line = (name: MeasureName): string =>
    `${name.padEnd(16)}${cells(
      [outcome.measures, yardsticks.central, yardsticks.known].map((values) =>
        figure(values[name] ?? null, MEASURES[name].unit),
      ),
    )}`;
  const names = MEASURE_NAMES.filter((name) => SHOWN.includes(name));
  return ['', `${'yardsticks'.padEnd(16)}${cells(['this run', 'central', 'known'])}`, ...names.map(line)];
}
