/**
 * From truth to what a vehicle perceives: compass, log, onboard clock and position fix.
 *
 * Compass = true heading + bias + white noise; log = speed·(1 + scale) + white noise; clock =
 * (1 + drift)·t + offset; a fix has independent normal errors per axis. Readings come in steps far finer
 * than their noise: 0.0001°, 0.01 mm/s, 1 mm. Bias and scale are drawn once
 * per vehicle and seed, unless the plan fixes them. Fixes come every `fixEveryS` from a drawn moment
 * of the first period on, so that the fleet's fixes do not fall on one tick; a fix by surface needs a
 * depth of less than a metre; with latency it arrives later and says when it was true.
 */
import { headingDegFromRad } from '../../messages/angles.ts';
import type { Fix } from '../../messages/sense.ts';
import { PURPOSE, normalPair, uniform, type Draw } from './draw.ts';
import { fixUpsetAt } from './faults.ts';
import type { FaultPlan, FixUpset, VehiclePlan } from './plan.ts';
import type { Truth } from './sea.ts';

const SURFACE_DEPTH_M = 1;
/** Steps per degree, per m/s, per metre. */
const HEADING_STEPS = 1e4;
const SPEED_STEPS = 1e5;
const LENGTH_STEPS = 1e3;

/** A reading on its instrument's scale. */
function stepped(value: number, stepsPerUnit: number): number {
  return Math.round(value * stepsPerUnit) / stepsPerUnit + 0;
}

/** What a depth gauge shows of a depth. */
export function depthReading(depthM: number): number {
  return stepped(depthM, LENGTH_STEPS);
}

/** A fix that was measured and has not arrived, or null; one per vehicle. */
export interface FixState {
  /** When the first fix falls due: a drawn moment of the first period. */
  readonly firstS: Float64Array;
  readonly waiting: (Fix | null)[];
  /** Tick at which the waiting fix arrives. */
  readonly arrivesTick: Int32Array;
  /** Fixes measured so far. */
  readonly measured: Uint32Array;
}

export function startFixes(draw: Draw, vehicles: readonly VehiclePlan[]): FixState {
  const count = vehicles.length;
  return {
    firstS: Float64Array.from(vehicles, (vehicle, index) =>
      vehicle.fixEveryS * uniform(draw, { entity: index, purpose: PURPOSE.fixStagger, count: 0 })),
    waiting: new Array<Fix | null>(count).fill(null),
    arrivesTick: new Int32Array(count),
    measured: new Uint32Array(count),
  };
}

/** The vehicle's own clock at a true time. */
export function onboardTimeS(plan: VehiclePlan, timeS: number): number {
  return timeS + plan.clockDriftRatio * timeS + plan.clockOffsetS + 0;
}

/** The compass bias and log scale of vehicle `index` for this seed. */
export function drawBiases(draw: Draw, plan: VehiclePlan, index: number): { biasRad: number; scale: number } {
  const pair = new Float64Array(2);
  normalPair(draw, { entity: index, purpose: PURPOSE.compassBias, count: 0 }, pair);
  const biasRad = plan.compassBiasRad ?? plan.compassBiasSigmaRad * pair[0]!;
  normalPair(draw, { entity: index, purpose: PURPOSE.logScale, count: 0 }, pair);
  return { biasRad, scale: plan.logScale ?? plan.logScaleSigma * pair[0]! };
}

export interface SensorTick {
  readonly draw: Draw;
  readonly plan: VehiclePlan;
  readonly truth: Truth;
  readonly index: number;
  readonly tick: number;
  readonly tickS: number;
  readonly faults: readonly FaultPlan[];
  readonly scratch: Float64Array;
}

/** Heading in degrees and speed in m/s as compass and log read them in this tick. */
export function readCompassAndLog(at: SensorTick): { heading_deg: number; speed_mps: number } {
  const { truth, index, plan, scratch } = at;
  normalPair(at.draw, { entity: index, purpose: PURPOSE.compassNoise, count: at.tick }, scratch);
  const headingRad = truth.headingRad[index]! + truth.compassBiasRad[index]! + plan.compassSigmaRad * scratch[0]!;
  const speedMps = truth.speedMps[index]! * (1 + truth.logScale[index]!) + plan.logSigmaMps * scratch[1]!;
  return { heading_deg: headingDegFromRad(headingRad, HEADING_STEPS), speed_mps: stepped(speedMps, SPEED_STEPS) };
}

/** Measures a fix if one falls on this tick, and hands over the one that arrives in it. */
export function readFix(at: SensorTick, fixes: FixState): Fix | null {
  const { plan, truth, index, tick, tickS } = at;
  const dueS = fixes.firstS[index]! + plan.fixEveryS * fixes.measured[index]!;
  if (tick * tickS >= dueS) {
    const count = fixes.measured[index]!;
    fixes.measured[index] = count + 1;
    const upset = fixUpsetAt(at.faults, index, tick * tickS);
    const isWithin = plan.fixFrom === 'baseline' || truth.depthM[index]! < SURFACE_DEPTH_M;
    if (isWithin && upset?.how !== 'outage') {
      fixes.waiting[index] = measureFix(at, count, upset);
      fixes.arrivesTick[index] = tick + Math.ceil(plan.fixLatencyS / tickS);
    }
  }
  const waiting = fixes.waiting[index]!;
  if (waiting === null || tick < fixes.arrivesTick[index]!) return null;
  fixes.waiting[index] = null;
  return waiting;
}

function measureFix(at: SensorTick, count: number, upset: FixUpset | null): Fix {
  const { draw, plan, truth, index, scratch } = at;
  const outliers = upset?.how === 'outliers'
    ? upset
    : { share: plan.fixOutlierShare, sigmaM: plan.fixOutlierSigmaM };
  const isOutlier = uniform(draw, { entity: index, purpose: PURPOSE.fixOutlier, count }) < outliers.share;
  const sigmaM = isOutlier ? outliers.sigmaM : plan.fixSigmaM;
  const jump = upset?.how === 'jump' ? upset : { eastM: 0, northM: 0 };
  normalPair(draw, { entity: index, purpose: PURPOSE.fixNoise, count }, scratch);
  return {
    at_s: onboardTimeS(plan, at.tick * at.tickS),
    east_m: stepped(truth.eastM[index]! + jump.eastM + sigmaM * scratch[0]!, LENGTH_STEPS),
    north_m: stepped(truth.northM[index]! + jump.northM + sigmaM * scratch[1]!, LENGTH_STEPS),
    sigma_m: plan.fixSigmaM,
  };
}
