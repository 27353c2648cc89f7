/**
 * Whole numbers in a row of bits, most significant bit first, and fixed-point numbers on top.
 * Nothing here allocates; a cursor is an index in bits that the caller keeps.
 */
import { assert } from './assert.ts';

/** Writes `value` (a whole number in [0, 2^width)) at `bitIndex`; width 1 to 32. */
export function putBits(
  bytes: Uint8Array,
  bitIndex: number,
  width: number,
  value: number,
): void {
  assert(Number.isInteger(value) && value >= 0, 'a field is a whole number, not negative');
  assert(value < 2 ** width, 'a field fits its width');
  for (let offset = 0; offset < width; offset++) {
    const bit = Math.floor(value / 2 ** (width - 1 - offset)) & 1;
    const at = bitIndex + offset;
    const mask = 0x80 >> (at & 7);
    const old = bytes[at >> 3]!;
    bytes[at >> 3] = bit === 1 ? old | mask : old & ~mask;
  }
}

/** Reads a whole number of `width` bits (1 to 32) at `bitIndex`. */
export function getBits(bytes: Uint8Array, bitIndex: number, width: number): number {
  let value = 0;
  for (let offset = 0; offset < width; offset++) {
    const at = bitIndex + offset;
    value = value * 2 + ((bytes[at >> 3]! >> (7 - (at & 7))) & 1);
  }
  return value;
}

/** A fixed-point field: a signed one spans ±(2^(width−1) − 1) steps, an unsigned one 0 to 2^width − 1. */
export interface FixedPoint {
  readonly width: number;
  readonly step: number;
  readonly signed: boolean;
}

/** The largest value that the field can hold; a signed field is symmetric about zero. */
export function fixedPointMax(field: FixedPoint): number {
  return field.signed
    ? (2 ** (field.width - 1) - 1) * field.step
    : (2 ** field.width - 1) * field.step;
}

/** `value` to the nearest code, held to the field's range (NaN is a bug and is refused). */
export function toCode(field: FixedPoint, value: number): number {
  assert(value === value, 'a fixed-point value is a number');
  const most = field.signed ? 2 ** (field.width - 1) - 1 : 2 ** field.width - 1;
  const least = field.signed ? -most : 0;
  const steps = Math.min(most, Math.max(least, Math.round(value / field.step)));
  return steps < 0 ? steps + 2 ** field.width : steps + 0;
}

/** The value of a code; `toCode(fromCode(code)) === code` for every code that `toCode` makes. */
export function fromCode(field: FixedPoint, code: number): number {
  const half = 2 ** (field.width - 1);
  const steps = field.signed && code >= half ? code - 2 ** field.width : code;
  return steps * field.step;
}

/** `value` as the far end of the link will read it. */
export function rounded(field: FixedPoint, value: number): number {
  return fromCode(field, toCode(field, value));
}
