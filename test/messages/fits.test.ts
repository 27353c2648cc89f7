/** The quick check is held to the slow one: whatever it accepts, the schema accepts too, unchanged. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { fitsSense, fitsSteer } from '../../messages/fits.ts';
import { senseSchema } from '../../messages/sense.ts';
import { steerSchema } from '../../messages/steer.ts';
import { steerTo } from '../support/sea-plan.ts';

const sense = {
  tick: 5, at_s: 5, heading_deg: 12.5, speed_mps: 1.2, depth_m: 40, battery: 0.9,
  fix: { at_s: 4, east_m: 1, north_m: 2, sigma_m: 5 }, heard: [{ at_s: 4.5, bytes: 'ab01' }], orders: ['home'],
};
const steer = {
  ...steerTo(5, { heading_deg: 10, speed_mps: 1, say: 'ff', heard: 2 }),
  map: { east_mps: Array<number>(64).fill(0.1), north_mps: Array<number>(64).fill(0), sigma_mps: Array<number>(64).fill(0.02) },
};

/** Every path of a value, leaves and groups alike. */
function paths(value: unknown, at: string[] = []): string[][] {
  if (typeof value !== 'object' || value === null) return [at];
  return [at, ...Object.entries(value).slice(0, 20).flatMap(([key, inner]) => paths(inner, [...at, key]))];
}

function withValue(value: unknown, path: readonly string[], put: unknown): unknown {
  if (path.length === 0) return put;
  const copy = structuredClone(value) as Record<string, unknown>;
  let holder = copy;
  for (const step of path.slice(0, -1)) holder = holder[step] as Record<string, unknown>;
  if (put === undefined) delete holder[path.at(-1)!];
  else holder[path.at(-1)!] = put;
  return copy;
}

const odd = fc.oneof(
  fc.constantFrom(undefined, null, true, '', 'ab', 'AB', 'zz', 'holding', 'used', 360, 1, -1e-9, 1.5, 1e13, -1e13, NaN, Infinity, [], [1], {}, { x: 1 }),
  fc.double(), fc.integer(), fc.string(), fc.anything(),
);

describe.each([
  ['fitsSense', sense, fitsSense, senseSchema],
  ['fitsSteer', steer, fitsSteer, steerSchema],
] as const)('%s', (_name, good, fits, schema) => {
  it('takes a good message, as the schema does', () => {
    expect(fits(good)).toBe(true);
    expect(schema.safeParse(good).success).toBe(true);
  });

  it('never takes what the schema refuses, whatever stands where', () => {
    fc.assert(fc.property(fc.constantFrom(...paths(good)), odd, (path, put) => {
      const changed = withValue(good, path, put);
      if (fits(changed)) expect(schema.safeParse(changed)).toMatchObject({ success: true });
    }), { numRuns: 3000 });
  });

  it('never takes a key too many', () => {
    for (const path of paths(good)) {
      const place = path.reduce<unknown>((holder, step) => (holder as Record<string, unknown>)[step], good);
      if (typeof place !== 'object' || place === null || Array.isArray(place)) continue;
      const changed = withValue(good, [...path, 'more'], 1);
      expect(fits(changed)).toBe(false);
      if (fits(changed)) expect(schema.safeParse(changed)).toMatchObject({ success: true });
    }
  });
});
