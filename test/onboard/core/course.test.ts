/**
 * Checks against METHODS A20 (ring in a current; figures derived there and re-computed, tags [D][R]):
 * ground speed and crab on a course, the turn rate that a circle takes, the time of a lap.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { groundSpeedMps, headingForCourse, orderForGround } from '../../../onboard/core/course.ts';

const DEG = Math.PI / 180;
const eastward = { eastMps: 0.5, northMps: 0 };

/** METHODS A20: v 1.5 m/s, current 0.5 m/s setting 090. Course deg, ground speed m/s, heading deg. */
const A20_COURSES = [
  [0, 1.414214, 340.5288],
  [45, 1.811291, 31.367],
  [90, 2, 90],
  [135, 1.811291, 148.633],
  [180, 1.414214, 199.4712],
  [270, 1, 270],
] as const;

/** METHODS A20: tightest radius (m) for a turn rate (deg/s): v 1.5, current 0.5, and still water. */
const A20_TURNS = [
  [2, 76.39, 42.97], [3, 50.93, 28.65], [5, 30.56, 17.19], [10, 15.28, 8.59],
] as const;

describe('a course in a current', () => {
  it.each(A20_COURSES)('%i° is made good at %f m/s on heading %f°', (courseDeg, groundMps, headingDeg) => {
    expect(groundSpeedMps(courseDeg * DEG, 1.5, eastward)).toBeCloseTo(groundMps, 6);
    const heading = headingForCourse(courseDeg * DEG, 1.5, eastward) / DEG;
    expect((heading + 360) % 360).toBeCloseTo(headingDeg, 4);
  });

  it.each(A20_TURNS)('%i deg/s is what a circle of the tightest radius takes', (turnDegps, inCurrentM, stillM) => {
    // The table's radii are rounded to 0.01 m, so the ratio is known to half of that in the radius.
    const inCurrent = steepestTurnDegps(inCurrentM, eastward) / turnDegps;
    const still = steepestTurnDegps(stillM, { eastMps: 0, northMps: 0 }) / turnDegps;
    expect(Math.abs(inCurrent - 1)).toBeLessThan(0.0051 / inCurrentM);
    expect(Math.abs(still - 1)).toBeLessThan(0.0051 / stillM);
  });

  it.each([
    [0, 2094.3951], [0.5, 2289.3139], [0.75, 2608.8217],
  ])('of %f m/s makes a lap of 500 m radius at 1.5 m/s take %f s', (driftMps, lapS) => {
    const points = 20_000;
    let sumS = 0;
    for (let k = 0; k < points; k++) {
      const courseRad = (2 * Math.PI * (k + 0.5)) / points;
      sumS += (2 * Math.PI * 500) / points / groundSpeedMps(courseRad, 1.5, { eastMps: driftMps, northMps: 0 });
    }
    expect(sumS).toBeCloseTo(lapS, 4);
  });

  it('is steered so that the way through the water and the current add up to it', () => {
    const part = fc.double({ min: -0.8, max: 0.8, noNaN: true });
    fc.assert(fc.property(part, part, fc.double({ min: 0, max: 6.28, noNaN: true }), (eastMps, northMps, courseRad) => {
      fc.pre(eastMps * eastMps + northMps * northMps < 0.6);
      const order = { headingRad: 0, speedMps: 0, overpowered: true };
      const current = { eastMps, northMps };
      orderForGround({ courseRad, groundMps: 0.4, minMps: 0, maxMps: 1.6 }, current, order);
      expect(order.overpowered).toBe(false);
      expect(order.speedMps * Math.sin(order.headingRad) + eastMps).toBeCloseTo(0.4 * Math.sin(courseRad), 9);
      expect(order.speedMps * Math.cos(order.headingRad) + northMps).toBeCloseTo(0.4 * Math.cos(courseRad), 9);
    }));
  });

  it('across a current that is too strong is called so, and the heading is straight across it', () => {
    const order = { headingRad: 0, speedMps: 0, overpowered: false };
    orderForGround({ courseRad: 0, groundMps: 1, minMps: 0.5, maxMps: 1.6 }, { eastMps: 2, northMps: 0 }, order);
    expect(order.overpowered).toBe(true);
    expect(order.speedMps).toBe(1.6);
    expect(order.headingRad).toBeCloseTo(-Math.PI / 2, 9);
    expect(groundSpeedMps(0, 1.6, { eastMps: 2, northMps: 0 })).toBe(0);
  });
});

/** Steepest change of heading along a clockwise circle at 1.5 m/s through the water, by small differences. */
function steepestTurnDegps(radiusM: number, current: { eastMps: number; northMps: number }): number {
  const steps = 3600;
  const stepRad = (2 * Math.PI) / steps;
  let steepest = 0;
  for (let k = 0; k < steps; k++) {
    const courseRad = k * stepRad;
    const beforeRad = headingForCourse(courseRad - stepRad / 2, 1.5, current);
    const turnRad = headingForCourse(courseRad + stepRad / 2, 1.5, current) - beforeRad;
    const timeS = (radiusM * stepRad) / groundSpeedMps(courseRad, 1.5, current);
    steepest = Math.max(steepest, turnRad / timeS / DEG);
  }
  return steepest;
}
