/**
 * Gaps: the distance along the loop from each counted vehicle to the next one ahead, against its target.
 *
 * Even spacing: every target is length over the number of counted vehicles. A list of offsets: the
 * offsets of the counted vehicles make a pattern; its gaps, in cyclic order, are laid on the vehicles'
 * gaps in cyclic order at the turn that fits best (least squares, the first of equals), since who takes
 * which place is for the agents. Vehicles at one phase stand in fleet order. All gaps sum to the loop.
 */
import { assert } from '../../messages/assert.ts';
import type { Trial } from '../trial/schema.ts';

export interface Gaps {
  readonly lengthM: number;
  /** Fleet indices of the counted vehicles. */
  readonly counted: Int32Array;
  /** The same, by phase; kept from tick to tick, so that sorting it is nearly free. */
  readonly order: Int32Array;
  /** Gaps of the pattern in cyclic order, or null when all are alike. */
  readonly pattern: Float64Array | null;
  /** By fleet index: (gap − target) / target; written by `measureGaps`. */
  readonly error: Float64Array;
  /** Gap of each place in `order`, in shares of the loop. */
  readonly share: Float64Array;
}

/** Gaps among the vehicles at `counted`, of a fleet of `fleetSize`. */
export function startGaps(
  spacing: Trial['mission']['spacing'],
  counted: readonly number[],
  of: { fleetSize: number; lengthM: number },
): Gaps {
  return {
    lengthM: of.lengthM,
    counted: Int32Array.from(counted),
    order: Int32Array.from(counted),
    pattern: spacing === 'even' ? null : patternGaps(counted.map((index) => spacing[index] ?? 0)),
    error: new Float64Array(of.fleetSize),
    share: new Float64Array(counted.length),
  };
}

function patternGaps(offsets: readonly number[]): Float64Array {
  const sorted = Float64Array.from(offsets).sort();
  return sorted.map((offset, place) => {
    const gap = place + 1 < sorted.length ? sorted[place + 1]! - offset : sorted[0]! + 1 - offset;
    assert(gap > 0, 'no two places of the pattern are one');
    return gap;
  });
}

/** Renews `error` from the phases of all vehicles, by fleet index. */
export function measureGaps(gaps: Gaps, phases: Float64Array): void {
  const { order, share, pattern, error } = gaps;
  const count = order.length;
  sortByPhase(order, phases);
  for (let place = 0; place < count; place++) {
    const here = phases[order[place]!]!;
    share[place] = place + 1 < count ? phases[order[place + 1]!]! - here : phases[order[0]!]! + 1 - here;
  }
  const turn = pattern === null ? 0 : bestTurn(share, pattern);
  for (let place = 0; place < count; place++) {
    const target = pattern === null ? 1 / count : pattern[(place + turn) % count]!;
    error[order[place]!] = (share[place]! - target) / target;
  }
}

/** Insertion sort: the order hardly changes from tick to tick. */
function sortByPhase(order: Int32Array, phases: Float64Array): void {
  for (let place = 1; place < order.length; place++) {
    const index = order[place]!;
    const phase = phases[index]!;
    let at = place;
    for (; at > 0; at--) {
      const before = order[at - 1]!;
      if (phases[before]! < phase || (phases[before]! === phase && before < index)) break;
      order[at] = before;
    }
    order[at] = index;
  }
}

function bestTurn(share: Float64Array, pattern: Float64Array): number {
  let best = 0;
  let least = Infinity;
  for (let turn = 0; turn < share.length; turn++) {
    let sum = 0;
    for (let place = 0; place < share.length; place++) {
      const target = pattern[(place + turn) % share.length]!;
      sum += ((share[place]! - target) / target) ** 2;
    }
    if (sum < least) {
      least = sum;
      best = turn;
    }
  }
  return best;
}
