import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { commonSpeedMps } from '../../../onboard/core/common-speed.ts';
import { groundSpeedMps } from '../../../onboard/core/course.ts';
import { makeLoop, tangentRad } from '../../../onboard/core/loop.ts';

const loop = makeLoop({ shape: 'circle', centre: { east_m: 0, north_m: 0 }, radius_m: 600, turn: 'clockwise' });
const range = { minMps: 0.5, cruiseMps: 1.2, maxMps: 1.6 };

function uniform(eastMps: number, northMps: number): { east: Float64Array; north: Float64Array } {
  return { east: new Float64Array(64).fill(eastMps), north: new Float64Array(64).fill(northMps) };
}

describe('the common speed along the loop', () => {
  it('is the cruise speed in still water and in weak currents', () => {
    expect(commonSpeedMps(loop, range, uniform(0, 0))).toBe(1.2);
    expect(commonSpeedMps(loop, range, uniform(0.2, 0.2))).toBe(1.2);
  });

  // METHODS part D: drift + v_min ≤ u ≤ v_max − drift: with 0.5 to 1.6 m/s one speed exists to 0.55 m/s.
  it.each([0.1, 0.3, 0.5, 0.52])('can be kept all round in %f m/s of drift', (driftMps) => {
    const speedMps = commonSpeedMps(loop, range, uniform(driftMps, 0));
    expect(speedMps).toBeGreaterThanOrEqual(driftMps + 0.5 - 1e-9);
    expect(speedMps).toBeLessThanOrEqual(1.6 - driftMps + 1e-9);
  });

  it('in drift that leaves none is the one that is kept on average over a lap', () => {
    const driftMps = 0.84;
    const speedMps = commonSpeedMps(loop, range, uniform(0, driftMps));
    let lapS = 0;
    for (let k = 0; k < 64; k++) {
      const courseRad = tangentRad(loop, k / 64);
      const fast = groundSpeedMps(courseRad, 1.6, { eastMps: 0, northMps: driftMps });
      const slow = groundSpeedMps(courseRad, 0.5, { eastMps: 0, northMps: driftMps });
      lapS += loop.lengthM / 64 / Math.min(fast, Math.max(slow, speedMps));
    }
    expect((loop.lengthM / lapS) / speedMps).toBeCloseTo(1, 1);
  });

  it('differs little between maps that differ little, and is always above 0', () => {
    const part = fc.double({ min: -1.5, max: 1.5, noNaN: true });
    fc.assert(fc.property(part, part, (eastMps, northMps) => {
      const one = commonSpeedMps(loop, range, uniform(eastMps, northMps));
      const other = commonSpeedMps(loop, range, uniform(eastMps + 0.01, northMps));
      expect(one).toBeGreaterThan(0);
      expect(one).toBeLessThanOrEqual(2.2);
      expect(Math.abs(one - other)).toBeLessThan(0.15);
    }));
  });
});
