/**
 * The two ways of saying "this cannot be". They stay on in the bench and in the vehicle: a failed
 * assertion is a bug of ours, so the process stops and says where.
 */

/** Throws when `condition` does not hold; write comparisons so that NaN makes them false. */
export function assert(condition: boolean, message: string): asserts condition {
  if (!condition) throw new Error(`assertion failed: ${message}`);
}

/** Closes a `switch` over a closed union: the compiler proves that it is never reached. */
export function unreachable(value: never): never {
  throw new Error(`assertion failed: unexpected value ${String(value)}`);
}
