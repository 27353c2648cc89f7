/** What vehicles perceive: errors of the stated size, by their statistics; the contract's own schema; the clock. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { startSea } from '../../../hil-sim/sea/advance.ts';
import type { SeaPlan, VehiclePlan } from '../../../hil-sim/sea/plan.ts';
import { senseSchema, type Fix } from '../../../messages/sense.ts';
import { seaPlan, steerTo, vehiclePlan } from '../../support/sea-plan.ts';
import { FRAME, runSea } from '../../support/sea-runs.ts';

const DEG = Math.PI / 180;
const still = { heading_deg: 90, speed_mps: 0 };

function moments(values: readonly number[]): { mean: number; sd: number } {
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  return { mean, sd: Math.sqrt(values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / values.length) };
}

/** Fixes of one vehicle that lies still at the datum, with the tick in which each arrived. */
function fixesOf(change: Partial<VehiclePlan>, ticks: number, more: Partial<SeaPlan> = {}): { tick: number; fix: Fix }[] {
  const sea = startSea(seaPlan({ vehicles: [vehiclePlan(change)], ...more }));
  const got: { tick: number; fix: Fix }[] = [];
  runSea(sea, ticks, (sense) => {
    if (sense.fix !== null) got.push({ tick: sense.tick, fix: sense.fix });
    return still;
  });
  return got;
}

describe('compass and log', () => {
  it('read truth, bias and white noise of the stated size, each tick anew', () => {
    const vehicle = vehiclePlan({ compassBiasRad: 2 * DEG, compassSigmaRad: 0.5 * DEG, logScale: 0.01, logSigmaMps: 0.02, startHeadingRad: 1 });
    const sea = startSea(seaPlan({ vehicles: [vehicle] }));
    const headings: number[] = [];
    const speeds: number[] = [];
    runSea(sea, 20_000, (sense) => {
      headings.push(sense.heading_deg - sea.truth.headingRad[0]! / DEG);
      speeds.push(sense.speed_mps - 1.01 * sea.truth.speedMps[0]!);
      return { heading_deg: 60, speed_mps: 1.2 };
    });
    // Five standard errors: 5/√20000 = 3.5 % of the sigma for the mean, 2.5 % for the sigma itself.
    const [compass, log] = [moments(headings), moments(speeds)];
    expect(Math.abs(compass.mean - 2)).toBeLessThan(0.5 * 0.035);
    expect(Math.abs(compass.sd / 0.5 - 1)).toBeLessThan(0.025);
    expect(Math.abs(log.mean)).toBeLessThan(0.02 * 0.035);
    expect(Math.abs(log.sd / 0.02 - 1)).toBeLessThan(0.025);
    const neighbours = headings.slice(1).map((value, at) => (value - 2) * (headings[at]! - 2));
    expect(Math.abs(moments(neighbours).mean)).toBeLessThan((0.25 * 5) / Math.sqrt(20_000));
    const both = headings.map((value, at) => (value - 2) * speeds[at]!);
    expect(Math.abs(moments(both).mean)).toBeLessThan((0.01 * 5) / Math.sqrt(20_000));
  });

  it('have biases of the stated spread over seeds, unless the plan fixes them', () => {
    const drawn = Array.from({ length: 4000 }, (_none, seed) => startSea(seaPlan({
      seed, vehicles: [vehiclePlan({ compassBiasRad: null, compassBiasSigmaRad: 0.02, logScale: null, logScaleSigma: 0.01 })],
    })).truth);
    const bias = moments(drawn.map((truth) => truth.compassBiasRad[0]!));
    const scale = moments(drawn.map((truth) => truth.logScale[0]!));
    expect(Math.abs(bias.mean)).toBeLessThan((5 * 0.02) / Math.sqrt(4000));
    expect(Math.abs(bias.sd / 0.02 - 1)).toBeLessThan(5 / Math.sqrt(8000));
    expect(Math.abs(scale.sd / 0.01 - 1)).toBeLessThan(5 / Math.sqrt(8000));
    const fixed = startSea(seaPlan({ vehicles: [vehiclePlan({ compassBiasRad: 0.03, compassBiasSigmaRad: 1, logScale: -0.02 })] })).truth;
    expect([fixed.compassBiasRad[0], fixed.logScale[0]]).toEqual([0.03, -0.02]);
  });
});

describe('fixes', () => {
  it('have independent errors of the stated sigma on each axis', () => {
    const fixes = fixesOf({ fixEveryS: 1, fixSigmaM: 5 }, 10_000).map(({ fix }) => fix);
    const [east, north] = [moments(fixes.map((fix) => fix.east_m)), moments(fixes.map((fix) => fix.north_m))];
    for (const { mean, sd } of [east, north]) {
      expect(Math.abs(mean)).toBeLessThan(0.25);
      expect(Math.abs(sd / 5 - 1)).toBeLessThan(0.035);
    }
    expect(Math.abs(moments(fixes.map((fix) => fix.east_m * fix.north_m)).mean)).toBeLessThan(25 * 0.05);
    expect(fixes.every((fix) => fix.sigma_m === 5)).toBe(true);
  });

  it('are outliers in the stated share, of the stated sigma, and do not say so', () => {
    const fixes = fixesOf({ fixEveryS: 1, fixSigmaM: 1, fixOutlierShare: 0.1, fixOutlierSigmaM: 1000 }, 10_000).map(({ fix }) => fix);
    // Beyond 6 m per axis: of the outliers all but 0.48 % (2Φ(0.006) − 1 = 0.0048), of the others none.
    const far = fixes.filter((fix) => Math.abs(fix.east_m) > 6);
    expect(Math.abs(far.length / fixes.length - 0.0995)).toBeLessThan(0.015);
    expect(Math.abs(moments(far.map((fix) => fix.east_m)).sd / 1000 - 1)).toBeLessThan(0.12);
    expect(new Set(fixes.map((fix) => fix.sigma_m))).toEqual(new Set([1]));
  });

  it('say when and where they were true, on the own clock, and arrive their latency later', () => {
    const vehicle = { fixSigmaM: 0, fixLatencyS: 7.5, startHeadingRad: Math.PI / 2, clockOffsetS: 30, clockDriftRatio: 1e-3 };
    const sea = startSea(seaPlan({ vehicles: [vehiclePlan(vehicle)] }));
    const east: number[] = [];
    let got = 0;
    runSea(sea, 1300, (sense) => {
      east.push(sea.truth.eastM[0]!);
      if (sense.fix !== null) {
        got += 1;
        const measuredTick = sense.tick - 8;
        expect(sense.fix.at_s).toBeCloseTo(measuredTick * 1.001 + 30, 9);
        expect(sense.fix.east_m).toBeCloseTo(east[measuredTick]!, 3);
      }
      return { heading_deg: 90, speed_mps: 1 };
    });
    expect(got).toBe(4);
  });

  it('from the surface come above one metre only; from a baseline at any depth', () => {
    expect(fixesOf({ fixFrom: 'surface', startDepthM: 40 }, 1200)).toEqual([]);
    const sea = startSea(seaPlan({ vehicles: [vehiclePlan({ fixFrom: 'surface', startDepthM: 0.9, fixEveryS: 60 })] }));
    let got = 0;
    for (let tick = 0; tick < 600; tick++) {
      if (sea.perceive()[0]!.fix !== null) got += 1;
      sea.advance([{ ...steerTo(tick, still), depth_m: tick < 300 ? 0.9 : 1.1 }]);
    }
    expect(got).toBe(5);
    expect(fixesOf({ startDepthM: 400 }, 1200)).toHaveLength(4);
  });

  it('of a fleet fall on moments of their own, spread over the period', () => {
    const vehicles = Array.from({ length: 16 }, (_none, index) => vehiclePlan({ name: `v${index}` }));
    const first = new Map<number, number>();
    runSea(startSea(seaPlan({ vehicles })), 301, (sense, index) => {
      if (sense.fix !== null && !first.has(index)) first.set(index, sense.tick);
      return still;
    });
    const ticks = [...first.values()];
    expect(ticks).toHaveLength(16);
    expect(new Set(ticks).size).toBeGreaterThanOrEqual(14);
    expect(Math.max(...ticks) - Math.min(...ticks)).toBeGreaterThan(150);
  });

  it('follow the script: none in an outage, a jump in a jump, more outliers in outliers', () => {
    const fault = (upset: Extract<SeaPlan['faults'][number], { kind: 'fix' }>['upset']): Partial<SeaPlan> =>
      ({ faults: [{ kind: 'fix', atS: 100, untilS: 200, vehicles: [0], upset }] });
    const every = { fixEveryS: 1, fixSigmaM: 0 };
    const out = fixesOf(every, 300, fault({ how: 'outage' })).map(({ tick }) => tick);
    expect(out.filter((tick) => tick >= 100 && tick < 200)).toEqual([]);
    expect(out.length).toBeGreaterThanOrEqual(199);
    for (const { tick, fix } of fixesOf(every, 300, fault({ how: 'jump', eastM: 40, northM: -7 }))) {
      expect([fix.east_m, fix.north_m]).toEqual(tick >= 100 && tick < 200 ? [40, -7] : [0, 0]);
    }
    const wild = fixesOf(every, 300, fault({ how: 'outliers', share: 0.5, sigmaM: 100 }));
    const hit = wild.filter(({ fix }) => fix.east_m !== 0).map(({ tick }) => tick);
    expect(hit.every((tick) => tick >= 100 && tick < 200)).toBe(true);
    expect(Math.abs(hit.length - 50)).toBeLessThanOrEqual(25);
  });
});

describe('senses', () => {
  const vehicles = fc.array(fc.record({
    compassSigmaRad: fc.constantFrom(0, 0.1), compassBiasRad: fc.constantFrom(0, -3, 0.02), logSigmaMps: fc.constantFrom(0, 0.3),
    clockOffsetS: fc.constantFrom(0, -5, 3600), clockDriftRatio: fc.constantFrom(0, -1e-4), fixEveryS: fc.constantFrom(1, 7),
    fixSigmaM: fc.constantFrom(0.001, 50), startDepthM: fc.constantFrom(0, 40), startHeadingRad: fc.constantFrom(0, 6.283185307179586, -1),
  }), { minLength: 1, maxLength: 4 });

  it('meet their schema whatever the plan, hold no −0, and are the same when asked for twice', () => {
    fc.assert(fc.property(vehicles, fc.nat(4_294_967_295), (changes, seed) => {
      const plan = seaPlan({ seed, vehicles: changes.map((change, index) => vehiclePlan({ name: `v${index}`, ...change })) });
      const sea = startSea({ ...plan, modem: { ...plan.modem, link: { loss: 0.1, burst: 1, delayS: 1, jitterS: 2, repeat: 0.3, garble: 0.1 } } });
      runSea(sea, 60, (sense, index) => {
        senseSchema.parse(sense);
        expect(sea.perceive()[index]).toEqual(structuredClone(sense));
        const minus: string[] = [];
        JSON.stringify(sense, (key, value: unknown) => {
          if (Object.is(value, -0)) minus.push(key);
          return value;
        });
        expect(minus).toEqual([]);
        return { heading_deg: 359.9, speed_mps: 0, say: FRAME };
      });
    }), { numRuns: 25 });
  });

  it('count ticks from 0, and tell time as tick times length, not as a sum', () => {
    const sea = startSea(seaPlan({ tickS: 0.1 }));
    const times: number[] = [];
    runSea(sea, 1000, (sense) => {
      times.push(sense.at_s);
      return still;
    });
    expect(times[0]).toBe(0);
    expect(times[3]).toBe(3 * 0.1);
    expect(times[999]).toBe(999 * 0.1);
  });
});
