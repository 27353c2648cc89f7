/**
 * The Kalman filter behind the map: mean x and covariance P over
 *
 *   uniform current (2) · tide of known period (4: east cos, sin, north cos, sin)
 *   · stream-function modes, values (M) and rates (M), each Matérn-3/2 in time
 *   · per vehicle: compass bias and log scale (2 N) · per vehicle: errors of its last fix (2 N)
 *   · the errors of a note's new fix while the note is taken in (2)
 *
 * Time of the state is the end of the last note taken in (`take-note.ts`). Everything is in flat
 * arrays, sized at start. Matérn-3/2: σ² e^(−λt)(1 + λt), λ = √3 over the decorrelation time; value and
 * rate make it a two-state process (Hartikainen and Särkkä 2010, from memory).
 */
import { assert } from '../../messages/assert.ts';
import type { Basis } from './basis.ts';

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
  readonly rowEast: Float64Array;
  readonly rowNorth: Float64Array;
  readonly gain: Float64Array;
}

export interface Filter {
  readonly mean: Float64Array;
  readonly covariance: Float64Array;
  /** Number of the last note taken in, per origin; 0 if none. */
  readonly lastNumber: Int32Array;
  /** Time of the state; notes taken in. */
  readonly clock: { atS: number; cursor: number };
}

export const TIDE_AT = 2;
export const CURRENT_STATES = 6;
const NEVER = -1e9;

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
      rowEast: new Float64Array(size),
      rowNorth: new Float64Array(size),
      gain: new Float64Array(size),
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
  to.clock.atS = from.clock.atS;
  to.clock.cursor = from.clock.cursor;
}

/** How a mode's value and rate after `dtS` follow from those now; backwards by a straight line. */
export interface Transition {
  valueOfValue: number;
  valueOfRate: number;
  rateOfValue: number;
  rateOfRate: number;
  /** Share of the mode's variance that is new after `dtS`. */
  newVariance: number;
}

export function transition(perS: number, dtS: number): Transition {
  if (dtS <= 0) return { valueOfValue: 1, valueOfRate: dtS, rateOfValue: 0, rateOfRate: 1, newVariance: 0 };
  const x = perS * dtS;
  const fade = Math.exp(-x);
  const valueOfValue = fade * (1 + x);
  const valueOfRate = fade * dtS;
  return {
    valueOfValue,
    valueOfRate,
    rateOfValue: -fade * x * perS,
    rateOfRate: fade * (1 - x),
    newVariance: Math.max(0, 1 - valueOfValue ** 2 - (valueOfRate * perS) ** 2),
  };
}

/** Moves the filter on to a later time. */
export function predict(plan: FilterPlan, filter: Filter, atS: number): void {
  const { clock, mean, covariance } = filter;
  if (clock.atS === NEVER) clock.atS = atS;
  const dtS = atS - clock.atS;
  assert(dtS >= 0, 'a filter moves forward');
  if (dtS === 0) return;
  clock.atS = atS;
  const f = transition(plan.modePerS, dtS);
  const { size, valueAt, rateAt } = plan;
  const { count } = plan.basis;
  for (let mode = 0; mode < count; mode++) {
    const value = mean[valueAt + mode]!;
    const rate = mean[rateAt + mode]!;
    mean[valueAt + mode] = f.valueOfValue * value + f.valueOfRate * rate;
    mean[rateAt + mode] = f.rateOfValue * value + f.rateOfRate * rate;
    const valueRow = (valueAt + mode) * size;
    const rateRow = (rateAt + mode) * size;
    for (let at = 0; at < size; at++) {
      const v = covariance[valueRow + at]!;
      const r = covariance[rateRow + at]!;
      covariance[valueRow + at] = f.valueOfValue * v + f.valueOfRate * r;
      covariance[rateRow + at] = f.rateOfValue * v + f.rateOfRate * r;
    }
  }
  predictColumns(plan, filter, f);
  addNewVariance(plan, filter, f, dtS);
}

function predictColumns(plan: FilterPlan, filter: Filter, f: Transition): void {
  const { size, valueAt, rateAt } = plan;
  const { count } = plan.basis;
  const { covariance } = filter;
  for (let row = 0; row < size; row++) {
    const value = row * size + valueAt;
    const rate = row * size + rateAt;
    for (let mode = 0; mode < count; mode++) {
      const v = covariance[value + mode]!;
      const r = covariance[rate + mode]!;
      covariance[value + mode] = f.valueOfValue * v + f.valueOfRate * r;
      covariance[rate + mode] = f.rateOfValue * v + f.rateOfRate * r;
    }
  }
}

/** Process noise: what keeps each mode's variance at its prior, and the slow drift of the biases. */
function addNewVariance(plan: FilterPlan, filter: Filter, f: Transition, dtS: number): void {
  const { size, valueAt, rateAt, modePerS: perS } = plan;
  const { covariance } = filter;
  const variance = plan.modeSigmaMps ** 2;
  const rateVariance = variance * perS * perS;
  const newRate = rateVariance - f.rateOfValue ** 2 * variance - f.rateOfRate ** 2 * rateVariance;
  const newCross = -f.valueOfValue * f.rateOfValue * variance - f.valueOfRate * f.rateOfRate * rateVariance;
  for (let mode = 0; mode < plan.basis.count; mode++) {
    const v = valueAt + mode;
    const r = rateAt + mode;
    covariance[v * size + v]! += f.newVariance * variance;
    covariance[r * size + r]! += Math.max(0, newRate);
    covariance[v * size + r]! += newCross;
    covariance[r * size + v]! += newCross;
  }
  for (let vehicle = 0; vehicle < plan.fleetSize; vehicle++) {
    const bias = plan.biasAt + 2 * vehicle;
    covariance[bias * size + bias]! += plan.biasGrowth * dtS;
    covariance[(bias + 1) * size + bias + 1]! += plan.scaleGrowth * dtS;
  }
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

/** One scalar measurement: value = row·x + noise. The covariance stays symmetric to the last bit. */
export function update(
  plan: FilterPlan,
  filter: Filter,
  row: Float64Array,
  measured: { value: number; variance: number },
): void {
  const { size } = plan;
  const { gain } = plan.scratch;
  const { mean, covariance } = filter;
  gain.fill(0);
  let expected = 0;
  for (let at = 0; at < size; at++) {
    const weight = row[at]!;
    if (weight === 0) continue;
    expected += weight * mean[at]!;
    const start = at * size;
    for (let other = 0; other < size; other++) gain[other]! += weight * covariance[start + other]!;
  }
  let spread = measured.variance;
  for (let at = 0; at < size; at++) spread += row[at]! * gain[at]!;
  assert(spread > 0, 'an innovation has a spread');
  const root = 1 / Math.sqrt(spread);
  const innovation = (measured.value - expected) / spread;
  for (let at = 0; at < size; at++) {
    mean[at]! += gain[at]! * innovation;
    gain[at]! *= root;
  }
  for (let at = 0; at < size; at++) {
    const own = gain[at]!;
    if (own === 0) continue;
    const start = at * size;
    for (let other = 0; other < size; other++) covariance[start + other]! -= own * gain[other]!;
  }
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
