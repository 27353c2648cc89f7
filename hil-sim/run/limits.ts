/**
 * Limits against measures. A name ending in `Min` must be at least its value, every other at most;
 * equal is met. A measure that is null leaves its limit unmet, since nothing shows that it holds; the
 * one exception is the separation of vehicles that never came to one depth.
 *
 * The margin is in the measure's unit: room left if positive, what is lacking if negative, null if there
 * is no value.
 */
import type { TrialLimits } from '../trial/schema.ts';
import type { MeasureReport } from './measure-report.ts';
import { MEASURES, type MeasureName } from './measures.ts';
import type { Worst } from './tally.ts';

type LimitName = Exclude<keyof TrialLimits, 'except'>;

/** What each limit acts on; the order is that of the table. */
const ACTS_ON = {
  formUpWithin: 'formUp_s',
  crossTrackRms: 'crossTrackRms',
  crossTrackMax: 'crossTrackMax',
  gapRms: 'gapRms',
  separationMin: 'separationMin',
  currentRms: 'currentRms',
  mapRms: 'mapRms',
  mapSpread: 'mapSpread',
  positionRms: 'positionRms',
  deliveryRatioMin: 'deliveryRatio',
  energy: 'energy_Wh',
  lateTicks: 'lateTicks',
} as const satisfies Record<LimitName, MeasureName>;

const LIMIT_NAMES = Object.keys(ACTS_ON) as LimitName[];
const J_PER_WH = 3600;

export interface LimitResult {
  readonly name: string;
  readonly value: number | null;
  readonly limit: number;
  readonly unit: string;
  readonly met: boolean;
  readonly margin: number | null;
  readonly worst: Worst;
}

/** Every limit that the trial sets, in the order of the table. */
export function judgeLimits(limits: TrialLimits, report: MeasureReport): LimitResult[] {
  return LIMIT_NAMES.flatMap((name) => {
    const set = limits[name];
    return set === undefined ? [] : [judge(name, name === 'energy' ? set / J_PER_WH : set, report)];
  });
}

function judge(name: LimitName, limit: number, report: MeasureReport): LimitResult {
  const measure = ACTS_ON[name];
  const value = report.values[measure];
  const margin = value === null ? null : isLeast(name) ? value - limit : limit - value;
  const neverNear = name === 'separationMin' && value === null;
  return {
    name,
    value,
    limit,
    unit: MEASURES[measure].unit,
    met: neverNear || (margin !== null && margin >= 0),
    margin,
    worst: report.worst[measure],
  };
}

/** Whether a limit is a lower bound. */
export function isLeast(name: string): boolean {
  return name.endsWith('Min');
}

/** The margin as a share of the limit, to compare limits of different units; −1 where there is no value. */
export function marginShare(result: LimitResult): number {
  if (result.margin === null) return result.met ? 1 : -1;
  if (result.limit === 0) return result.margin < 0 ? -1 : 0;
  return result.margin / result.limit;
}

export type Verdict = 'pass' | 'fail';

export function verdictOf(results: readonly LimitResult[]): Verdict {
  return results.every((result) => result.met) ? 'pass' : 'fail';
}
