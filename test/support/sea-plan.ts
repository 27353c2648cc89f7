/** A plan for tests of the sea: invented vehicles, quiet water, perfect sensors unless changed. */
import type { SeaPlan, VehiclePlan } from '../../hil-sim/sea/plan.ts';
import type { Steer } from '../../messages/steer.ts';

export function vehiclePlan(change: Partial<VehiclePlan> = {}): VehiclePlan {
  return {
    name: 'amber', startEastM: 0, startNorthM: 0, startDepthM: 40, startHeadingRad: 0,
    cruiseMps: 1.5, speedMinMps: 0.5, speedMaxMps: 1.6, speedLagS: 0, turnRateRadps: Math.PI, climbMps: 0.3,
    batteryJ: 7.2e6, powerHotelW: 30, powerCruiseW: 60, clockOffsetS: 0, clockDriftRatio: 0,
    fixFrom: 'baseline', fixEveryS: 300, fixSigmaM: 5, fixLatencyS: 0, fixOutlierShare: 0, fixOutlierSigmaM: 60,
    compassBiasSigmaRad: 0, compassBiasRad: 0, compassSigmaRad: 0, logScaleSigma: 0, logScale: 0, logSigmaMps: 0,
    ...change,
  };
}

export function seaPlan(change: Partial<SeaPlan> = {}): SeaPlan {
  return {
    seed: 1,
    tickS: 1,
    vehicles: [vehiclePlan()],
    currents: [],
    modem: {
      frameBytes: 32, bitRateBps: 640, slotS: 4, turnOnS: 0.2, guardS: 0.05,
      link: { loss: 0, burst: 1, delayS: 0, jitterS: 0, repeat: 0, garble: 0 },
    },
    faults: [],
    orders: [],
    water: { temperatureDegC: 9, salinityPsu: 35.2, depthM: 180 },
    ...change,
  };
}

/** A steer that orders a heading and speed, says what it is given, and uses every frame heard. */
export function steerTo(tick: number, order: { heading_deg: number; speed_mps: number; say?: string | null; heard?: number }): Steer {
  return {
    tick, heading_deg: order.heading_deg, speed_mps: order.speed_mps, depth_m: 40, say: order.say ?? null,
    state: 'holding', reasons: ['start'], heard: Array.from({ length: order.heard ?? 0 }, () => 'used' as const),
    estimate: {
      east_m: 0, north_m: 0, varEast_m2: 1, covEastNorth_m2: 0, varNorth_m2: 1, currentEast_mps: 0, currentNorth_mps: 0,
      varCurrentEast_m2ps2: 1, covCurrentEastNorth_m2ps2: 0, varCurrentNorth_m2ps2: 1, phase: 0, compassBias_deg: 0,
      compassBiasSigma_deg: 1, logScale: 0, logScaleSigma: 0.01, notesHeld: 0,
    },
    map: null,
  };
}
