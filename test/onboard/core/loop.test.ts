import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { LoopMessage } from '../../../messages/shape.ts';
import {
  curvaturePerM, makeLoop, nearestPlace, pointAt, tangentRad, type LoopPlace,
} from '../../../onboard/core/loop.ts';

const circles = fc.record({
  shape: fc.constant('circle' as const),
  centre: fc.record({
    east_m: fc.double({ min: -3000, max: 3000, noNaN: true }),
    north_m: fc.double({ min: -3000, max: 3000, noNaN: true }),
  }),
  radius_m: fc.double({ min: 50, max: 3000, noNaN: true }),
  turn: fc.constantFrom('clockwise' as const, 'anticlockwise' as const),
});
const phases = fc.double({ min: 0, max: 0.999999, noNaN: true });

function ring(turn: LoopMessage['turn']): ReturnType<typeof makeLoop> {
  return makeLoop({ shape: 'circle', centre: { east_m: 100, north_m: -50 }, radius_m: 600, turn });
}

function placeOf(loop: ReturnType<typeof makeLoop>, eastM: number, northM: number): LoopPlace {
  const place = { phase: NaN, crossTrackM: NaN };
  nearestPlace(loop, eastM, northM, place);
  return place;
}

describe('the loop', () => {
  it('puts phase 0 due north of the centre and lets it grow along travel', () => {
    const point = new Float64Array(2);
    pointAt(ring('clockwise'), 0, point);
    expect([...point]).toEqual([100, 550]);
    pointAt(ring('clockwise'), 0.25, point);
    expect(point[0]).toBeCloseTo(700, 9);
    pointAt(ring('anticlockwise'), 0.25, point);
    expect(point[0]).toBeCloseTo(-500, 9);
  });

  it('counts cross-track to the right of travel: inside a clockwise ring, outside an anticlockwise one', () => {
    expect(placeOf(ring('clockwise'), 100, 540).crossTrackM).toBeCloseTo(10, 9);
    expect(placeOf(ring('anticlockwise'), 100, 540).crossTrackM).toBeCloseTo(-10, 9);
    expect(curvaturePerM(ring('clockwise'))).toBe(1 / 600);
    expect(curvaturePerM(ring('anticlockwise'))).toBe(-1 / 600);
  });

  it('has an answer at its very centre', () => {
    expect(placeOf(ring('clockwise'), 100, -50)).toEqual({ phase: 0, crossTrackM: 600 });
  });

  it('is 2πR long', () => {
    expect(ring('clockwise').lengthM).toBeCloseTo(3769.911184307752, 9);
  });

  it('finds from a point of the loop the phase it was made from', () => {
    fc.assert(fc.property(circles, phases, (message, phase) => {
      const loop = makeLoop(message);
      const point = new Float64Array(2);
      pointAt(loop, phase, point);
      const place = placeOf(loop, point[0]!, point[1]!);
      const off = Math.abs(place.phase - phase);
      expect(Math.min(off, 1 - off)).toBeLessThan(1e-9);
      expect(Math.abs(place.crossTrackM)).toBeLessThan(1e-8);
    }));
  });

  it('points along travel: a short way on moves the point by that way along the tangent', () => {
    fc.assert(fc.property(circles, phases, (message, phase) => {
      const loop = makeLoop(message);
      const from = new Float64Array(2);
      const to = new Float64Array(2);
      const stepM = loop.lengthM * 1e-5;
      pointAt(loop, phase, from);
      pointAt(loop, phase + 1e-5, to);
      expect((to[0]! - from[0]!) / stepM).toBeCloseTo(Math.sin(tangentRad(loop, phase)), 3);
      expect((to[1]! - from[1]!) / stepM).toBeCloseTo(Math.cos(tangentRad(loop, phase)), 3);
    }));
  });

  it('no point of the loop is nearer than the one it names, by a dense search', () => {
    fc.assert(fc.property(circles, fc.double({ min: -1, max: 1, noNaN: true }), phases, (message, share, phase) => {
      const loop = makeLoop(message);
      const point = new Float64Array(2);
      pointAt(loop, phase, point);
      const eastM = loop.centreEastM + (point[0]! - loop.centreEastM) * (1 + 0.9 * share);
      const northM = loop.centreNorthM + (point[1]! - loop.centreNorthM) * (1 + 0.9 * share);
      const place = placeOf(loop, eastM, northM);
      let leastM = Infinity;
      for (let k = 0; k < 720; k++) {
        pointAt(loop, k / 720, point);
        leastM = Math.min(leastM, Math.sqrt((point[0]! - eastM) ** 2 + (point[1]! - northM) ** 2));
      }
      expect(Math.abs(place.crossTrackM)).toBeLessThanOrEqual(leastM + 1e-9);
      pointAt(loop, place.phase, point);
      const namedM = Math.sqrt((point[0]! - eastM) ** 2 + (point[1]! - northM) ** 2);
      expect(namedM).toBeCloseTo(Math.abs(place.crossTrackM), 6);
    }), { numRuns: 50 });
  });
});
