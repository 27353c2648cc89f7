/**
 * What JSON would do to a message, without JSON: −0 becomes 0. NaN and infinity, which JSON would turn
 * into null, are a bug of ours and stop the run. A test holds this road equal to the wire's.
 */
import { assert } from './assert.ts';

/** Normalises a message of plain objects, arrays, numbers, text, booleans and null, in place. */
export function normalise<T>(message: T): T {
  if (typeof message === 'object' && message !== null) visit(message as Record<string, unknown>, 0);
  return message;
}

const DEPTH_MAX = 8;

function visit(holder: Record<string, unknown> | unknown[], depth: number): void {
  assert(depth < DEPTH_MAX, 'messages are shallow');
  if (Array.isArray(holder)) {
    for (let index = 0; index < holder.length; index++) {
      const value = holder[index];
      if (typeof value === 'number') {
        if (!plain(value)) holder[index] = 0;
      } else if (typeof value === 'object' && value !== null) visit(value as Record<string, unknown>, depth + 1);
    }
    return;
  }
  for (const key in holder) {
    const value = holder[key];
    if (typeof value === 'number') {
      if (!plain(value)) holder[key] = 0;
    } else if (typeof value === 'object' && value !== null) visit(value as Record<string, unknown>, depth + 1);
  }
}

/** Whether a number survives JSON as it is; only −0 does not and is still allowed. */
function plain(value: number): boolean {
  assert(value - value === 0, 'a message holds finite numbers');
  return value !== 0 || Object.is(value, 0);
}
