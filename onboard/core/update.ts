/**
 * A pair of measurements, east and north, taken in at once: x += K ν, P −= K S Kᵀ.
 *
 * `compare` works out innovation ν, its spread S and the products P rowᵀ, and answers the normalised
 * innovation squared; `absorb` then changes the filter. With S = L Lᵀ the change of P is two outer
 * products of one vector with itself, so that P stays symmetric to the last bit.
 */
import { assert } from '../../messages/assert.ts';
import type { Filter, FilterPlan } from './filter.ts';

/** Two measured values with independent white errors of one variance. */
export interface Pair {
  readonly east: number;
  readonly north: number;
  readonly variance: number;
}

/** Compares a pair with what the rows in `plan.scratch` expect of it; answers νᵀ S⁻¹ ν. */
export function compare(plan: FilterPlan, filter: Filter, pair: Pair): number {
  const { rowEast, rowNorth, gainEast, gainNorth, innovation } = plan.scratch;
  timesRows(plan, filter);
  const { mean } = filter;
  let east = pair.east;
  let north = pair.north;
  let varEast = pair.variance;
  let cross = 0;
  let varNorth = pair.variance;
  for (let at = 0; at < plan.size; at++) {
    const weightEast = rowEast[at]!;
    const weightNorth = rowNorth[at]!;
    east -= weightEast * mean[at]!;
    north -= weightNorth * mean[at]!;
    varEast += weightEast * gainEast[at]!;
    cross += weightNorth * gainEast[at]!;
    varNorth += weightNorth * gainNorth[at]!;
  }
  innovation[0] = east;
  innovation[1] = north;
  innovation[2] = varEast;
  innovation[3] = cross;
  innovation[4] = varNorth;
  const determinant = varEast * varNorth - cross * cross;
  assert(varEast > 0 && determinant > 0, 'an innovation has a spread');
  return (varNorth * east * east - 2 * cross * east * north + varEast * north * north) / determinant;
}

/** Writes P rowᵀ of both rows, in one passage through P. */
function timesRows(plan: FilterPlan, filter: Filter): void {
  const { rowEast, rowNorth, gainEast, gainNorth } = plan.scratch;
  const { covariance } = filter;
  const { size } = plan;
  gainEast.fill(0);
  gainNorth.fill(0);
  for (let at = 0; at < size; at++) {
    const weightEast = rowEast[at]!;
    const weightNorth = rowNorth[at]!;
    if (weightEast === 0 && weightNorth === 0) continue;
    const start = at * size;
    for (let other = 0; other < size; other++) {
      const entry = covariance[start + other]!;
      gainEast[other]! += weightEast * entry;
      gainNorth[other]! += weightNorth * entry;
    }
  }
}

/** Takes in the pair that was last compared. */
export function absorb(plan: FilterPlan, filter: Filter): void {
  const { size } = plan;
  const { gainEast, gainNorth, innovation } = plan.scratch;
  const { mean, covariance } = filter;
  const rootEast = Math.sqrt(innovation[2]!);
  const slant = innovation[3]! / rootEast;
  const rootNorth = Math.sqrt(innovation[4]! - slant * slant);
  const east = innovation[0]! / rootEast;
  const north = (innovation[1]! - slant * east) / rootNorth;
  for (let at = 0; at < size; at++) {
    const a = gainEast[at]! / rootEast;
    const b = (gainNorth[at]! - slant * a) / rootNorth;
    gainEast[at] = a;
    gainNorth[at] = b;
    mean[at]! += a * east + b * north;
  }
  for (let at = 0; at < size; at++) {
    const a = gainEast[at]!;
    const b = gainNorth[at]!;
    const start = at * size;
    for (let other = 0; other < size; other++) {
      covariance[start + other]! -= a * gainEast[other]! + b * gainNorth[other]!;
    }
  }
}
