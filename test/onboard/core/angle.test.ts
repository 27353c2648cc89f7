import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { wrapHalf, wrapRad, wrapTurns } from '../../../onboard/core/angle.ts';

const turns = fc.double({ min: -1e4, max: 1e4, noNaN: true });

describe('wrapping', () => {
  it('keeps places on the loop in [0, 1), whole turns apart', () => {
    fc.assert(fc.property(turns, (value) => {
      const wrapped = wrapTurns(value);
      expect(wrapped >= 0 && wrapped < 1).toBe(true);
      expect(Math.abs((value - wrapped) - Math.round(value - wrapped))).toBeLessThan(1e-9);
    }));
  });

  it('keeps differences in [−½, ½) and angles in [−π, π)', () => {
    fc.assert(fc.property(turns, (value) => {
      const half = wrapHalf(value);
      const angle = wrapRad(value);
      expect(half >= -0.5 && half < 0.5).toBe(true);
      expect(angle >= -Math.PI && angle <= Math.PI).toBe(true);
      expect(Math.cos(angle)).toBeCloseTo(Math.cos(value), 9);
      expect(Math.sin(angle)).toBeCloseTo(Math.sin(value), 9);
    }));
  });

  it.each([[0, 0], [1, 0], [-0.25, 0.75], [2.5, 0.5], [-1e-18, 0]])('puts %f turns at %f', (from, to) => {
    expect(wrapTurns(from)).toBe(to);
  });
});
