/**
 * Running sums of one error over vehicles and ticks: what a root mean square needs, each vehicle's
 * greatest value and when it was. Sized at start; adding allocates nothing.
 */

export interface Tally {
  /** By fleet index. */
  readonly sumSquares: Float64Array;
  readonly counts: Float64Array;
  readonly greatest: Float64Array;
  readonly greatestAtS: Float64Array;
}

/** Where a measure is at its worst; null where it belongs to no vehicle or no moment. */
export interface Worst {
  readonly vehicle: string | null;
  readonly at_s: number | null;
  /** The other vehicle, where the measure is of two. */
  readonly with?: string | undefined;
}

export const NOWHERE: Worst = { vehicle: null, at_s: null };

export function startTally(fleetSize: number): Tally {
  return {
    sumSquares: new Float64Array(fleetSize),
    counts: new Float64Array(fleetSize),
    greatest: new Float64Array(fleetSize),
    greatestAtS: new Float64Array(fleetSize),
  };
}

/** Takes one value (not negative) of one vehicle. */
export function addTo(tally: Tally, index: number, value: number, timeS: number): void {
  addSquare(tally, index, value * value, timeS);
}

/** Takes the square of a value: the norm of a vector without its root. */
export function addSquare(tally: Tally, index: number, square: number, timeS: number): void {
  tally.sumSquares[index]! += square;
  tally.counts[index]! += 1;
  if (square > tally.greatest[index]! || tally.counts[index] === 1) {
    tally.greatest[index] = square;
    tally.greatestAtS[index] = timeS;
  }
}

export function clearTally(tally: Tally): void {
  tally.sumSquares.fill(0);
  tally.counts.fill(0);
  tally.greatest.fill(0);
  tally.greatestAtS.fill(0);
}

/** Root mean square over all vehicles; null if nothing was taken. */
export function rmsOf(tally: Tally): number | null {
  let sum = 0;
  let count = 0;
  for (let index = 0; index < tally.counts.length; index++) {
    sum += tally.sumSquares[index]!;
    count += tally.counts[index]!;
  }
  return count === 0 ? null : Math.sqrt(sum / count);
}

export function rmsOfVehicle(tally: Tally, index: number): number | null {
  return tally.counts[index] === 0 ? null : Math.sqrt(tally.sumSquares[index]! / tally.counts[index]!);
}

export function greatestOfVehicle(tally: Tally, index: number): number | null {
  return tally.counts[index] === 0 ? null : Math.sqrt(tally.greatest[index]!);
}

/** Greatest value over all vehicles; null if nothing was taken. */
export function greatestOf(tally: Tally): number | null {
  let greatest: number | null = null;
  for (let index = 0; index < tally.counts.length; index++) {
    const value = greatestOfVehicle(tally, index);
    if (value !== null && (greatest === null || value > greatest)) greatest = value;
  }
  return greatest;
}

/** The vehicle whose own value (`of`) is greatest, the first of equals, and when its greatest error was. */
export function worstBy(
  tally: Tally, names: readonly string[], of: (tally: Tally, index: number) => number | null,
): Worst {
  let worst = -1;
  let greatest = -1;
  for (let index = 0; index < names.length; index++) {
    const value = of(tally, index);
    if (value !== null && value > greatest) {
      greatest = value;
      worst = index;
    }
  }
  return worst < 0 ? NOWHERE : { vehicle: names[worst]!, at_s: tally.greatestAtS[worst]! };
}
