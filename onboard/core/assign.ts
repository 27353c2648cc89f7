/**
 * The cheapest way to give each of n rows a column of its own (Kuhn 1955, by shortest augmenting
 * paths: one row after another finds the cheapest chain of moves that makes room for it). Exact, in
 * at most n³ steps; of equal ways the same one everywhere for the same numbers.
 *
 * Row and column 0 of the work arrays stand for "none", so entries are counted from 1.
 */
import { assert } from '../../messages/assert.ts';

interface Work {
  readonly count: number;
  readonly costs: Float64Array;
  /** Prices of rows and columns: cost − both is never negative, and 0 where assigned. */
  readonly rowPrice: Float64Array;
  readonly columnPrice: Float64Array;
  /** Row of each column, 0 for none. */
  readonly rowOf: Int32Array;
  /** Column before each on the cheapest chain. */
  readonly before: Int32Array;
  readonly slack: Float64Array;
  readonly seen: Uint8Array;
}

/** Column of each row for the least sum of `costs[row · count + column]`, all finite. */
export function assignColumns(costs: Float64Array, count: number): Uint8Array {
  assert(costs.length === count * count, 'costs are square');
  const work: Work = {
    count,
    costs,
    rowPrice: new Float64Array(count + 1),
    columnPrice: new Float64Array(count + 1),
    rowOf: new Int32Array(count + 1),
    before: new Int32Array(count + 1),
    slack: new Float64Array(count + 1),
    seen: new Uint8Array(count + 1),
  };
  for (let row = 1; row <= count; row++) placeRow(work, row);
  const columnOf = new Uint8Array(count);
  for (let column = 1; column <= count; column++) columnOf[work.rowOf[column]! - 1] = column - 1;
  return columnOf;
}

/** Finds room for a row and moves those along the chain. */
function placeRow(work: Work, row: number): void {
  work.rowOf[0] = row;
  work.slack.fill(Infinity);
  work.seen.fill(0);
  let column = 0;
  // Each round sees one column more, so there are at most count + 1 of them.
  while (work.rowOf[column] !== 0) column = nextColumn(work, column);
  while (column !== 0) {
    const from = work.before[column]!;
    work.rowOf[column] = work.rowOf[from]!;
    column = from;
  }
}

/** Takes `column` into the chain, re-prices, and gives the column that is now free to reach. */
function nextColumn(work: Work, column: number): number {
  const { count, costs, rowPrice, columnPrice, rowOf, before, slack, seen } = work;
  seen[column] = 1;
  const row = rowOf[column]!;
  let least = Infinity;
  let next = 0;
  for (let other = 1; other <= count; other++) {
    if (seen[other] === 1) continue;
    const reduced = costs[(row - 1) * count + other - 1]! - rowPrice[row]! - columnPrice[other]!;
    if (reduced < slack[other]!) {
      slack[other] = reduced;
      before[other] = column;
    }
    if (slack[other]! < least) {
      least = slack[other]!;
      next = other;
    }
  }
  assert(next > 0, 'costs are finite');
  for (let other = 0; other <= count; other++) {
    if (seen[other] === 1) {
      rowPrice[rowOf[other]!]! += least;
      columnPrice[other]! -= least;
    } else slack[other]! -= least;
  }
  return next;
}
