/** Quantities with units as zod codecs: text in files, SI numbers (angles in radians) in code. */
import { z } from 'zod';
import { formatQuantity, parseQuantity, type Dimension } from '../../messages/units.ts';

export interface Bounds {
  readonly min?: number;
  readonly max?: number;
  /** The lower bound itself is not allowed. */
  readonly above?: number;
}

/** A quantity of one dimension: `"600 m"` ↔ 600. Bounds are in SI. */
export function quantity(dimension: Dimension, bounds: Bounds = {}): z.ZodCodec<z.ZodString, z.ZodNumber> {
  let number = z.number();
  if (bounds.min !== undefined) number = number.min(bounds.min);
  if (bounds.above !== undefined) number = number.gt(bounds.above);
  if (bounds.max !== undefined) number = number.max(bounds.max);
  return z.codec(z.string(), number, {
    decode: (text, context) => {
      const reading = parseQuantity(text, dimension);
      if (reading.ok) return reading.value;
      context.issues.push({ code: 'custom', message: reading.reason, input: text });
      return z.NEVER;
    },
    encode: (value) => formatQuantity(value, dimension),
  });
}
