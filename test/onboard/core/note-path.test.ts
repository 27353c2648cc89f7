import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { PATH_POINTS, PATH_SHARES, PATH_WEIGHTS, writePath } from '../../../onboard/core/note-path.ts';
import { someNotes } from '../../support/estimating.ts';

type Place = readonly [number, number];

function pathOf(start: Place, end: Place, sagM: number): Place[] {
  const out = new Float64Array(2 * PATH_POINTS);
  const [note] = someNotes(1, 1);
  writePath({ ...note!, startEastM: start[0], startNorthM: start[1], endEastM: end[0], endNorthM: end[1], sagM }, out);
  return Array.from({ length: PATH_POINTS }, (_, point) => [out[2 * point]!, out[2 * point + 1]!] as const);
}

describe('the points of a path', () => {
  it('have the shares and weights of five-point Gauss-Legendre on [0, 1] (Abramowitz and Stegun, table 25.4)', () => {
    // Abscissas and weights on [−1, 1] as printed there.
    const printed = [[0.906179845938664, 0.236926885056189], [0.538469310105683, 0.478628670499366], [0, 0.568888888888889]] as const;
    for (const [index, [x, weight]] of printed.entries()) {
      expect(PATH_SHARES[index]!).toBeCloseTo((1 - x) / 2, 14);
      expect(PATH_SHARES[4 - index]!).toBeCloseTo((1 + x) / 2, 14);
      expect(PATH_WEIGHTS[index]!).toBeCloseTo(weight / 2, 14);
      expect(PATH_WEIGHTS[4 - index]!).toBeCloseTo(weight / 2, 14);
    }
  });

  it('lie on a straight line where the path does not sag', () => {
    expect(pathOf([100, -50], [300, 350], 0)).toEqual(
      PATH_SHARES.map((share) => [expect.closeTo(100 + 200 * share, 9), expect.closeTo(-50 + 400 * share, 9)]),
    );
  });

  it('of a quarter, a half and three quarters of a ring gone clockwise lie on it, evenly by arc length', () => {
    // Clockwise round the origin from bearing 0: the middle lies to the left of the chord, sag < 0.
    for (const turns of [0.25, 0.5, 0.75]) {
      const full = 2 * Math.PI * turns;
      const sagM = -600 * (1 - Math.cos(full / 2));
      const found = pathOf([0, 600], [600 * Math.sin(full), 600 * Math.cos(full)], sagM);
      expect(found).toEqual(PATH_SHARES.map((share) => [
        expect.closeTo(600 * Math.sin(full * share), 6), expect.closeTo(600 * Math.cos(full * share), 6),
      ]));
    }
  });

  it('bulge to the right for a positive sag: going east, to the south', () => {
    const middle = pathOf([-100, 0], [100, 0], 30)[2]!;
    expect(middle).toEqual([expect.closeTo(0, 9), expect.closeTo(-30, 9)]);
  });

  it('are finite and near their fixes for any path that a frame can say', () => {
    const far = fc.double({ min: -4094, max: 4094, noNaN: true });
    fc.assert(fc.property(far, far, far, far, fc.double({ min: -769, max: 769, noNaN: true }), (a, b, c, d, sagM) => {
      const chord = Math.sqrt((c - a) ** 2 + (d - b) ** 2);
      for (const [east, north] of pathOf([a, b], [c, d], sagM)) {
        expect(Math.abs(east - (a + c) / 2)).toBeLessThanOrEqual(chord + 1600);
        expect(Math.abs(north - (b + d) / 2)).toBeLessThanOrEqual(chord + 1600);
      }
    }));
  });
});
