/**
 * Motion against the outside: a brute-force integration in steps of a thousandth of a tick, lap times by
 * the complete elliptic integral (METHODS A20), and arithmetic by hand.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { startSea } from '../../../hil-sim/sea/advance.ts';
import type { CurrentPlan, VehiclePlan } from '../../../hil-sim/sea/plan.ts';
import type { Sea } from '../../../hil-sim/sea/sea.ts';
import { seaPlan, steerTo, vehiclePlan } from '../../support/sea-plan.ts';
import { runSea } from '../../support/sea-runs.ts';

const DEG = Math.PI / 180;

const WATERS: readonly CurrentPlan[] = [
  { kind: 'uniform', setRad: 1.2, driftMps: 0.1 },
  { kind: 'tide', periodS: 44_714, majorMps: 0.25, minorMps: 0.05, bearingRad: 0.7, phaseRad: 0.3 },
  {
    kind: 'eddy', centreEastM: 200, centreNorthM: -100, radiusM: 500, peakMps: 0.25, turn: 'anticlockwise',
    movingSetRad: 0.7, movingDriftMps: 0.02,
  },
  { kind: 'shear', bearingRad: 0.4, gradientPerS: 1e-4 },
];

interface Way { eastM: number; northM: number; headingRad: number; speedMps: number }

/** One tick in a thousand small midpoint steps: dv/dt = (wanted − v)/lag, heading evenly to its end. */
function bruteTick(sea: Sea, plan: VehiclePlan, way: Way, order: { headingRad: number; speedMps: number; timeS: number; tickS: number }): Way {
  const steps = 1000;
  const stepS = order.tickS / steps;
  const most = plan.turnRateRadps * order.tickS;
  const wanted = Math.atan2(Math.sin(order.headingRad - way.headingRad), Math.cos(order.headingRad - way.headingRad));
  const turn = Math.max(-most, Math.min(most, wanted));
  const water = new Float64Array(2);
  let { eastM, northM, speedMps } = way;
  for (let at = 0; at < steps; at++) {
    const half = speedMps + ((order.speedMps - speedMps) / plan.speedLagS) * (stepS / 2);
    const heading = way.headingRad + (turn * (at + 0.5)) / steps;
    sea.currentAt(eastM, northM, order.timeS + (at + 0.5) * stepS, water);
    eastM += (half * Math.sin(heading) + water[0]!) * stepS;
    northM += (half * Math.cos(heading) + water[1]!) * stepS;
    speedMps += ((order.speedMps - half) / plan.speedLagS) * stepS;
  }
  return { eastM, northM, headingRad: way.headingRad + turn, speedMps };
}

describe('moveBody', () => {
  it.each([[1, 0.0005], [10, 0.05]])('stays beside a brute-force integration at ticks of %d s, to %d m in 400 ticks', (tickS, mostM) => {
    fc.assert(fc.property(
      fc.array(fc.tuple(fc.integer({ min: 0, max: 359 }), fc.double({ min: 0.5, max: 1.6, noNaN: true })), { minLength: 4, maxLength: 8 }),
      (orders) => {
        const vehicle = vehiclePlan({ speedLagS: 5, turnRateRadps: 5 * DEG });
        const sea = startSea(seaPlan({ tickS, vehicles: [vehicle], currents: WATERS }));
        let way: Way = { eastM: 0, northM: 0, headingRad: 0, speedMps: 0 };
        for (let tick = 0; tick < 400; tick++) {
          const [heading, speedMps] = orders[Math.floor(tick / 50) % orders.length]!;
          way = bruteTick(sea, vehicle, way, { headingRad: heading * DEG, speedMps, timeS: tick * tickS, tickS });
          sea.perceive();
          sea.advance([steerTo(tick, { heading_deg: heading, speed_mps: speedMps })]);
        }
        const east = sea.truth.eastM[0]! - way.eastM;
        const north = sea.truth.northM[0]! - way.northM;
        expect(Math.sqrt(east * east + north * north)).toBeLessThan(mostM);
        expect(sea.truth.speedMps[0]).toBeCloseTo(way.speedMps, 5);
      },
    ), { numRuns: 4, seed: 7 });
  });

  it('comes to 1 − 1/e of an ordered change of speed after one lag, and never turns back (first-order lag)', () => {
    const sea = startSea(seaPlan({ vehicles: [vehiclePlan({ speedLagS: 5 })] }));
    runSea(sea, 5, () => ({ heading_deg: 0, speed_mps: 1 }));
    expect(sea.truth.speedMps[0]).toBeCloseTo(0.632121, 6);
    // Way made in one lag: lag·v/e = 5 · 1 · 0.367879.
    expect(sea.truth.northM[0]).toBeCloseTo(1.839397, 6);
  });

  it('goes round in v/ω, still water: at 1.5 m/s and 5 deg/s a circle of 17.19 m (METHODS A20), closed after 72 s', () => {
    const sea = startSea(seaPlan({ vehicles: [vehiclePlan({ turnRateRadps: 5 * DEG })] }));
    let [west, east] = [0, 0];
    for (let tick = 0; tick < 72; tick++) {
      const heading = (sea.truth.headingRad[0]! / DEG + 90) % 360;
      sea.perceive();
      sea.advance([steerTo(tick, { heading_deg: heading, speed_mps: 1.5 })]);
      west = Math.min(west, sea.truth.eastM[0]!);
      east = Math.max(east, sea.truth.eastM[0]!);
    }
    expect((east - west) / 2).toBeCloseTo(17.19, 2);
    expect(sea.truth.eastM[0]).toBeCloseTo(0, 9);
    expect(sea.truth.northM[0]).toBeCloseTo(0, 9);
  });

  it.each([[0, 2094.3951], [0.5, 2289.3139], [0.75, 2608.8217]])(
    'laps a ring of 500 m at 1.5 m/s in a current of %d m/s in %d s (4Rv·E(f/v)/(v² − f²), METHODS A20)', (driftMps, lapS) => {
      const currents: CurrentPlan[] = [{ kind: 'uniform', setRad: Math.PI / 2, driftMps }];
      const sea = startSea(seaPlan({ tickS: 0.5, vehicles: [vehiclePlan({ startNorthM: 500, startHeadingRad: Math.PI / 2 })], currents }));
      const { eastM, northM } = sea.truth;
      let turned = 0;
      let before = 0;
      let tick = 0;
      while (turned + before < 2 * Math.PI) {
        turned += before;
        const [e, n] = [eastM[0]!, northM[0]!];
        const radius = Math.sqrt(e * e + n * n);
        // Clockwise along the tangent in the middle of the coming tick, eased back to the ring.
        const course = Math.atan2(e, n) + Math.PI / 2 + (0.5 * 0.5 * 1.5) / 500 + (radius - 500) / 20;
        const across = driftMps * Math.sin(Math.PI / 2 - course);
        const heading = (course - Math.asin(across / 1.5)) / DEG;
        sea.perceive();
        sea.advance([steerTo(tick, { heading_deg: ((heading % 360) + 360) % 360, speed_mps: 1.5 })]);
        tick += 1;
        before = Math.atan2(eastM[0]! * n - northM[0]! * e, e * eastM[0]! + n * northM[0]!);
        expect(Math.abs(radius - 500)).toBeLessThan(0.1);
      }
      const took = (tick - 1 + (2 * Math.PI - turned) / before) * 0.5;
      expect(Math.abs(took - lapS)).toBeLessThan(0.3);
    });

  it('climbs and dives no faster than it can, and never leaves the water', () => {
    const sea = startSea(seaPlan({ vehicles: [vehiclePlan({ startDepthM: 3, climbMps: 0.3 })] }));
    const depths: number[] = [];
    for (let tick = 0; tick < 15; tick++) {
      sea.perceive();
      sea.advance([{ ...steerTo(tick, { heading_deg: 0, speed_mps: 1 }), depth_m: tick < 12 ? 0 : 40 }]);
      depths.push(sea.truth.depthM[0]!);
    }
    expect(depths[4]).toBeCloseTo(1.5, 9);
    expect(depths[9]).toBeCloseTo(0, 9);
    expect(Math.min(...depths)).toBe(0);
    expect(depths[14]).toBeCloseTo(0.9, 9);
  });

  it('with an empty battery uses no more, slows to a stop in the water, and goes where the water goes', () => {
    // 30 + 60 W for 90 J/s of 9 kJ: 100 s of charge, by hand.
    const sea = startSea(seaPlan({
      vehicles: [vehiclePlan({ batteryJ: 9000, speedLagS: 5, cruiseMps: 1.5 })],
      currents: [{ kind: 'uniform', setRad: Math.PI / 2, driftMps: 0.4 }],
    }));
    runSea(sea, 400, () => ({ heading_deg: 0, speed_mps: 1.5 }));
    expect(sea.truth.energyJ[0]).toBeCloseTo(9000, 6);
    expect(sea.truth.battery[0]).toBe(0);
    expect(sea.perceive()[0]!.battery).toBe(0);
    const [east, north] = [sea.truth.eastM[0]!, sea.truth.northM[0]!];
    runSea(sea, 100, () => ({ heading_deg: 0, speed_mps: 1.5 }));
    expect(sea.truth.eastM[0]! - east).toBeCloseTo(40, 9);
    expect(sea.truth.northM[0]! - north).toBeCloseTo(0, 9);
  });

  it('steers by its own instruments: what compass and log read is what was ordered', () => {
    const sea = startSea(seaPlan({ vehicles: [vehiclePlan({ compassBiasRad: 3 * DEG, logScale: 0.02 })] }));
    runSea(sea, 10, () => ({ heading_deg: 1, speed_mps: 1 }));
    const sense = sea.perceive()[0]!;
    expect([sense.heading_deg, sense.speed_mps]).toEqual([1, 1]);
    expect(sea.truth.headingRad[0]! / DEG).toBeCloseTo(358, 9);
    expect(sea.truth.speedMps[0]).toBeCloseTo(1 / 1.02, 12);
  });
});
