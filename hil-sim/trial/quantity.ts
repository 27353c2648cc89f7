/** Quantities with units as zod codecs: text in files, SI numbers (angles in radians) in code. */
import { z } from 'zod';
import { formatQuantity, parseQuantity, unitsOf, type Dimension } from '../../messages/units.ts';

/** Bounds in SI; `above` is a lower bound that is itself not allowed. */
export interface Bounds {
  readonly min?: number;
  readonly max?: number;
  readonly above?: number;
}

export type Quantity = z.ZodCodec<z.ZodUnknown, z.ZodNumber>;

/** The bounds as people read them, in the unit that files use. */
function boundsText(dimension: Dimension, { min, max, above }: Bounds): string {
  const text = (value: number): string => formatQuantity(value, dimension);
  const parts = [
    ...(min === undefined ? [] : [`at least ${text(min)}`]),
    ...(above === undefined ? [] : [`more than ${text(above)}`]),
    ...(max === undefined ? [] : [`at most ${text(max)}`]),
  ];
  return parts.join(' and ');
}

/** What is wrong with `value`, or null. NaN fails every bound. */
function outside(value: number, { min, max, above }: Bounds): boolean {
  const low = min === undefined || value >= min;
  const open = above === undefined || value > above;
  const high = max === undefined || value <= max;
  return !(low && open && high);
}

/** A quantity of one dimension: `"600 m"` ↔ 600. */
export function quantity(dimension: Dimension, bounds: Bounds = {}): Quantity {
  const wanted = `a number with a unit (${unitsOf(dimension).join(', ')})`;
  return z.codec(z.unknown(), z.number(), {
    decode: (input, context) => {
      const refuse = (message: string): never => {
        context.issues.push({ code: 'custom', message, input });
        return z.NEVER;
      };
      if (input === undefined || input === null) return refuse(`is missing, but must be ${wanted}`);
      if (typeof input === 'number') return refuse(`is ${input} without a unit, but must be ${wanted}`);
      if (typeof input !== 'string') return refuse(`is no quantity, but must be ${wanted}`);
      const reading = parseQuantity(input, dimension);
      if (!reading.ok) return refuse(reading.reason);
      if (outside(reading.value, bounds)) return refuse(`is ${input}, but must be ${boundsText(dimension, bounds)}`);
      return reading.value;
    },
    encode: (value) => formatQuantity(value, dimension),
  });
}
