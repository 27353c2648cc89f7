/** Lamb-Oseen vortex, tidal ellipse and set conventions: METHODS A14, A20 with their sources; sound speed A1. */
import { describe, expect, it } from 'vitest';
import type { CurrentPlan } from '../../../hil-sim/sea/plan.ts';
import { soundSpeedMps } from '../../../hil-sim/sea/sound.ts';
import { currentAt } from '../../../hil-sim/sea/water.ts';

const rad = (deg: number): number => (deg * Math.PI) / 180;

function at(current: CurrentPlan, eastM: number, northM: number, timeS = 0): [number, number] {
  const out = new Float64Array(2);
  currentAt({ currents: [current], added: [] }, { eastM, northM, timeS }, out);
  return [out[0]!, out[1]!];
}

describe('currentAt', () => {
  it('takes set as the direction toward which the water flows (NMEA 0183 VDR, METHODS A13)', () => {
    const [east, north] = at({ kind: 'uniform', setRad: rad(90), driftMps: 0.5 }, 3, 4);
    expect(east).toBeCloseTo(0.5, 12);
    expect(north).toBeCloseTo(0, 12);
  });

  it('runs a tide round an ellipse: major along the bearing, minor to its left a quarter period later', () => {
    const tide: CurrentPlan = { kind: 'tide', periodS: 44_714.16, majorMps: 0.5, minorMps: 0.2, bearingRad: rad(90), phaseRad: rad(40) };
    const peakS = (44_714.16 * 40) / 360;
    expect(at(tide, 0, 0, peakS)).toEqual([expect.closeTo(0.5, 10), expect.closeTo(0, 10)]);
    expect(at(tide, 0, 0, peakS + 44_714.16 / 4)).toEqual([expect.closeTo(0, 10), expect.closeTo(0.2, 10)]);
  });

  it('agrees with the worked ellipse (.5, 40, .2, 130) of METHODS A14: major .5, minor +.2, inclination 0, phase 40', () => {
    const tide: CurrentPlan = { kind: 'tide', periodS: 360, majorMps: 0.5, minorMps: 0.2, bearingRad: rad(90), phaseRad: rad(40) };
    for (const timeS of [0, 33, 127, 300]) {
      const [east, north] = at(tide, 0, 0, timeS);
      expect(east).toBeCloseTo(0.5 * Math.cos(rad(timeS - 40)), 10);
      expect(north).toBeCloseTo(0.2 * Math.cos(rad(timeS - 130)), 10);
    }
  });

  it('has an eddy that is fastest at its radius, 1.1209 cores (METHODS A20), with the stated peak and turn', () => {
    const eddy: CurrentPlan = {
      kind: 'eddy', centreEastM: 200, centreNorthM: -100, radiusM: 500, peakMps: 0.25, turn: 'anticlockwise',
      movingSetRad: 0, movingDriftMps: 0,
    };
    const speed = (radiusM: number): number => Math.hypot(...at(eddy, 200 + radiusM, -100));
    expect(speed(500)).toBeCloseTo(0.25, 12);
    expect(speed(500 * 0.99)).toBeLessThan(0.25);
    expect(speed(500 * 1.01)).toBeLessThan(0.25);
    const core = 500 / 1.1209064;
    const law = (r: number): number => (1 - Math.exp(-((r / core) ** 2))) / r;
    expect(speed(900) / speed(300)).toBeCloseTo(law(900) / law(300), 7);
    expect(at(eddy, 700, -100)[1]).toBeGreaterThan(0);
    expect(at(eddy, 200, -100)).toEqual([0, 0]);
  });

  it('carries an eddy along its set', () => {
    const eddy: CurrentPlan = {
      kind: 'eddy', centreEastM: 0, centreNorthM: 0, radiusM: 500, peakMps: 0.25, turn: 'clockwise',
      movingSetRad: rad(90), movingDriftMps: 0.02,
    };
    expect(at(eddy, 72, 0, 3600)).toEqual([expect.closeTo(0, 12), expect.closeTo(0, 12)]);
  });

  it('has a shear that is zero on the line through the datum and grows to its right', () => {
    const shear: CurrentPlan = { kind: 'shear', bearingRad: 0, gradientPerS: 1e-4 };
    expect(at(shear, 0, 500)).toEqual([0, 0]);
    expect(at(shear, 1000, 500)).toEqual([0, expect.closeTo(0.1, 12)]);
    // Toward the east, its right is the south; toward 300°, a place 1000 m on bearing 030 of the datum is to its right.
    expect(at({ ...shear, bearingRad: rad(90) }, 300, -1000)).toEqual([expect.closeTo(0.1, 12), expect.closeTo(0, 12)]);
    const aslant = at({ ...shear, bearingRad: rad(300) }, 500, 866.025404);
    expect(aslant).toEqual([expect.closeTo(-0.0866025404, 9), expect.closeTo(0.05, 9)]);
  });

  it('adds the currents of faults for their span, and only then', () => {
    const out = new Float64Array(2);
    const water = { currents: [], added: [{ atS: 10, untilS: 20, current: { kind: 'uniform', setRad: 0, driftMps: 0.3 } as const }] };
    const north = [9, 10, 19, 20].map((timeS) => {
      currentAt(water, { eastM: 0, northM: 0, timeS }, out);
      return out[1];
    });
    expect(north).toEqual([0, 0.3, 0.3, 0]);
  });
});

describe('soundSpeedMps', () => {
  it.each([
    [25, 35, 1000, 1550.744], [0, 35, 0, 1448.96], [15, 35, 0, 1506.692225], [10, 35, 100, 1491.435068], [10, 35, 1000, 1506.263761],
  ])('gives the published check values of Mackenzie 1981 at %d degC, %d, %d m', (t, s, d, expected) => {
    expect(soundSpeedMps(t, s, d)).toBeCloseTo(expected, 3);
  });
});
