/**
 * The Kalman filter behind the map: mean x and covariance P over
 *
 *   uniform current (2) · tide of known period (4: east cos, sin, north cos, sin)
 *   · stream-function modes, values (M) and rates (M), each Matérn-3/2 in time
 *   · per vehicle: compass bias and log scale (2 N) · per vehicle: errors of its last fix (2 N)
 *   · the errors of a note's new fix while the note is taken in (2)
 *
 * Time of the state is the end of the last note taken in (`take-note.ts`). Everything is in flat
 * arrays, sized at start. `predict.ts` moves it in time, `update.ts` takes in a measurement.
 */
import type { Basis } from './basis.ts';
import { PATH_POINTS } from './note-path.ts';

export interface FilterPlan {
  readonly basis: Basis;
  readonly fleetSize: number;
  readonly tidePerS: number;
  readonly uniformSigmaMps: number;
  readonly tideSigmaMps: number;
  readonly modeSigmaMps: number;
  /** √3 over the decorrelation time. */
  readonly modePerS: number;
  readonly biasSigmaRad: number;
  readonly scaleSigma: number;
  /** Growth of their variances, per second. */
  readonly biasGrowth: number;
  readonly scaleGrowth: number;
  readonly noteSigmaMps: number;
  /** Misfit, summed over an origin's notes, at which water and sensors are held to have changed. */
  readonly surprise: number;
  /** Where things stand in the state. */
  readonly valueAt: number;
  readonly rateAt: number;
  readonly biasAt: number;
  readonly fixAt: number;
  readonly newFixAt: number;
  readonly size: number;
  /** What is given of a note's mean current, in the yardstick run that gives it; 0 otherwise. */
  readonly given: { east: number; north: number };
  readonly scratch: Scratch;
}

/** Working memory of one filter step; holds nothing between calls. */
interface Scratch {
  readonly modes: { readonly east: Float64Array; readonly north: Float64Array };
  /** cos and sin of the tide's angle. */
  readonly tide: Float64Array;
  /** Points of a note's path. */
  readonly path: Float64Array;
  readonly rowEast: Float64Array;
  readonly rowNorth: Float64Array;
  /** P row', east and north; then scaled. */
  readonly gainEast: Float64Array;
  readonly gainNorth: Float64Array;
  /** Innovation east, north; its variance east, covariance, variance north. */
  readonly innovation: Float64Array;
  /** How well the last note fitted: see `take-note.ts`. */
  readonly fit: Float64Array;
}

export interface Filter {
  readonly mean: Float64Array;
  readonly covariance: Float64Array;
  /** Number of the last note taken in, per origin; 0 if none. */
  readonly lastNumber: Int32Array;
  /** How far, per origin, its notes have lately been off beyond what was expected (`take-note.ts`). */
  readonly misfit: Float64Array;
  /** Time of the state; notes taken in. */
  readonly clock: { atS: number; cursor: number };
}

export const TIDE_AT = 2;
export const CURRENT_STATES = 6;
/** Time of a filter that has taken in nothing. */
export const NEVER = -1e9;

export type PlanNumbers = Omit<
  FilterPlan,
  'valueAt' | 'rateAt' | 'biasAt' | 'fixAt' | 'newFixAt' | 'size' | 'given' | 'scratch'
>;

/** Lays out the state. */
export function layOut(numbers: PlanNumbers): FilterPlan {
  const { count } = numbers.basis;
  const { fleetSize } = numbers;
  const valueAt = CURRENT_STATES;
  const rateAt = valueAt + count;
  const biasAt = rateAt + count;
  const fixAt = biasAt + 2 * fleetSize;
  const newFixAt = fixAt + 2 * fleetSize;
  const size = newFixAt + 2;
  return {
    ...numbers,
    valueAt,
    rateAt,
    biasAt,
    fixAt,
    newFixAt,
    size,
    given: { east: 0, north: 0 },
    scratch: {
      modes: { east: new Float64Array(count), north: new Float64Array(count) },
      tide: new Float64Array(2),
      path: new Float64Array(2 * PATH_POINTS),
      rowEast: new Float64Array(size),
      rowNorth: new Float64Array(size),
      gainEast: new Float64Array(size),
      gainNorth: new Float64Array(size),
      innovation: new Float64Array(5),
      fit: new Float64Array(2),
    },
  };
}

/** The filter before any note: the prior. */
export function startFilter(plan: FilterPlan): Filter {
  const { size } = plan;
  const filter: Filter = {
    mean: new Float64Array(size),
    covariance: new Float64Array(size * size),
    lastNumber: new Int32Array(plan.fleetSize),
    misfit: new Float64Array(plan.fleetSize),
    clock: { atS: NEVER, cursor: 0 },
  };
  resetFilter(plan, filter);
  return filter;
}

/** Puts a filter back to the prior. */
export function resetFilter(plan: FilterPlan, filter: Filter): void {
  const { covariance } = filter;
  filter.mean.fill(0);
  covariance.fill(0);
  filter.lastNumber.fill(0);
  filter.misfit.fill(0);
  filter.clock.atS = NEVER;
  filter.clock.cursor = 0;
  const set = (at: number, sigma: number): void => {
    covariance[at * plan.size + at] = sigma * sigma;
  };
  for (let at = 0; at < TIDE_AT; at++) set(at, plan.uniformSigmaMps);
  for (let at = TIDE_AT; at < CURRENT_STATES; at++) set(at, plan.tideSigmaMps);
  for (let mode = 0; mode < plan.basis.count; mode++) {
    set(plan.valueAt + mode, plan.modeSigmaMps);
    set(plan.rateAt + mode, plan.modeSigmaMps * plan.modePerS);
  }
  for (let vehicle = 0; vehicle < plan.fleetSize; vehicle++) {
    set(plan.biasAt + 2 * vehicle, plan.biasSigmaRad);
    set(plan.biasAt + 2 * vehicle + 1, plan.scaleSigma);
  }
}

/** Copies one filter over another of the same plan. */
export function copyFilter(from: Filter, to: Filter): void {
  to.mean.set(from.mean);
  to.covariance.set(from.covariance);
  to.lastNumber.set(from.lastNumber);
  to.misfit.set(from.misfit);
  to.clock.atS = from.clock.atS;
  to.clock.cursor = from.clock.cursor;
}

/** Makes one state a fresh, independent unknown. */
export function renewState(filter: Filter, size: number, at: number, sigma: number): void {
  filter.mean[at] = 0;
  for (let other = 0; other < size; other++) {
    filter.covariance[at * size + other] = 0;
    filter.covariance[other * size + at] = 0;
  }
  filter.covariance[at * size + at] = sigma * sigma;
}

/** Puts one state in the place of another, with all its correlations. */
export function moveState(filter: Filter, size: number, from: number, to: number): void {
  const { mean, covariance } = filter;
  mean[to] = mean[from]!;
  const variance = covariance[from * size + from]!;
  for (let other = 0; other < size; other++) {
    const value = covariance[from * size + other]!;
    covariance[to * size + other] = value;
    covariance[other * size + to] = value;
  }
  covariance[to * size + to] = variance;
}
