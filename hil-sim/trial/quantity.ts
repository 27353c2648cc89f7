/** Quantities with units as zod codecs: text in files, SI numbers (angles in radians) in code. */
import { z } from 'zod';
import {
  formatQuantity, parseQuantity, sayQuantity, wantedQuantity, type Dimension,
} from '../../messages/units.ts';

/** Bounds in SI; `above` is a lower bound that is itself not allowed. */
export interface Bounds {
  readonly min?: number;
  readonly max?: number;
  readonly above?: number;
}

export type Quantity = z.ZodCodec<z.ZodUnknown, z.ZodNumber>;

/** The bounds as people read them, in the unit that files use. */
function boundsText(dimension: Dimension, { min, max, above }: Bounds): string {
  const text = (value: number): string => sayQuantity(value, dimension);
  const parts = [
    ...(min === undefined ? [] : [`at least ${text(min)}`]),
    ...(above === undefined ? [] : [`more than ${text(above)}`]),
    ...(max === undefined ? [] : [`at most ${text(max)}`]),
  ];
  return `must be ${parts.join(' and ')}`;
}

/** Whether `value` breaks a bound; NaN breaks every one. */
function isOutside(value: number, { min, max, above }: Bounds): boolean {
  const low = min === undefined || value >= min;
  const open = above === undefined || value > above;
  const high = max === undefined || value <= max;
  return !(low && open && high);
}

/** What a refused quantity tells, in an issue's `params`. */
export interface Refusal {
  readonly found: string;
  readonly allowed: string;
}

/** A quantity of one dimension: `"600 m"` ↔ 600. */
export function quantity(dimension: Dimension, bounds: Bounds = {}): Quantity {
  const wanted = wantedQuantity(dimension);
  return z.codec(z.unknown(), z.number(), {
    decode: (input, context) => {
      const refuse = (found: string, allowed: string): never => {
        const params: Refusal = { found, allowed };
        context.issues.push({ code: 'custom', message: `${found}, but ${allowed}`, params, input });
        return z.NEVER;
      };
      if (input === undefined) return refuse('is missing', wanted);
      if (input === null) return refuse('is empty', wanted);
      if (typeof input === 'number') return refuse(`is ${input} without a unit`, wanted);
      if (typeof input !== 'string') return refuse('is no quantity', wanted);
      const reading = parseQuantity(input, dimension);
      if (!reading.ok) return refuse(reading.found, reading.allowed);
      if (isOutside(reading.value, bounds)) return refuse(`is ${input}`, boundsText(dimension, bounds));
      return reading.value;
    },
    encode: (value) => formatQuantity(value, dimension),
  });
}
