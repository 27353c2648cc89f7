/**
 * The filter moved on in time. Uniform current and tide stand still; each mode is Matérn-3/2 in time,
 * σ² e^(−λt)(1 + λt), λ = √3 over the decorrelation time: a two-state process of value and rate
 * (Hartikainen and Särkkä 2010, from memory). Biases take a slow random walk. A mode left alone keeps
 * its prior variance for ever.
 */
import { assert } from '../../messages/assert.ts';
import { NEVER, type Filter, type FilterPlan } from './filter.ts';

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
