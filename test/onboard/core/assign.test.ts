import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { assignColumns } from '../../../onboard/core/assign.ts';

/** Every order of the numbers below `count`: the slow and obvious way. */
function orders(count: number): number[][] {
  if (count === 0) return [[]];
  return orders(count - 1).flatMap((order) =>
    Array.from({ length: count }, (_, at) => [...order.slice(0, at), count - 1, ...order.slice(at)]));
}

const ORDERS = Array.from({ length: 7 }, (_, count) => orders(count));

function costOf(costs: Float64Array, columns: ArrayLike<number>): number {
  let sum = 0;
  for (let row = 0; row < columns.length; row++) sum += costs[row * columns.length + columns[row]!]!;
  return sum;
}

describe('giving rows their columns', () => {
  it('finds the least sum that trying every order finds', () => {
    const tables = fc.integer({ min: 1, max: 6 }).chain((count) =>
      fc.array(fc.integer({ min: 0, max: 40 }), { minLength: count * count, maxLength: count * count })
        .map((list) => [count, Float64Array.from(list)] as const));
    fc.assert(fc.property(tables, ([count, costs]) => {
      const columns = assignColumns(costs, count);
      expect([...columns].sort((a, b) => a - b)).toEqual(Array.from({ length: count }, (_, index) => index));
      expect(costOf(costs, columns)).toBe(Math.min(...ORDERS[count]!.map((order) => costOf(costs, order))));
    }), { numRuns: 150 });
  });

  it('is right by hand: rows 1 2 3, 2 4 6, 3 6 9 cost at least 3 + 4 + 3', () => {
    const costs = Float64Array.from([1, 2, 3, 2, 4, 6, 3, 6, 9]);
    expect([...assignColumns(costs, 3)]).toEqual([2, 1, 0]);
  });

  it('takes sixteen that all cost the same', () => {
    expect(new Set(assignColumns(new Float64Array(256), 16)).size).toBe(16);
  });
});
