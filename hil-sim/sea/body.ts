/**
 * One vehicle's motion for one tick: it turns toward its ordered heading at no more than its turn
 * rate, its speed follows the order with a first-order lag, its depth at no more than its climb, and
 * the water carries it. It steers by its own instruments: an order is met when compass and log read
 * it, so the true heading carries the compass bias and the true speed the log's scale.
 *
 * Within a tick it turns evenly, and its way through the water is the exact integral of that; the current
 * is that at the middle of the way, an error of third order in the tick's length: after 400 ticks with turns
 * in eddy, tide and shear below 0.5 mm at ticks of 1 s and 5 cm at 10 s.
 */
import { radFromDeg } from '../../messages/angles.ts';
import type { Steer } from '../../messages/steer.ts';
import type { VehiclePlan } from './plan.ts';
import type { Truth } from './sea.ts';
import { currentAt, type Water } from './water.ts';

const TURN = 2 * Math.PI;

/** The difference of two angles, in [−π, π). */
function turnBetween(fromRad: number, toRad: number): number {
  const turn = (toRad - fromRad + Math.PI) % TURN;
  return (turn < 0 ? turn + TURN : turn) - Math.PI;
}

/** A heading in [0, 2π). */
function wrapped(headingRad: number): number {
  const turned = headingRad % TURN;
  const positive = turned < 0 ? turned + TURN : turned;
  return positive < TURN ? positive + 0 : 0;
}

function clamp(value: number, least: number, most: number): number {
  return value < least ? least : value > most ? most : value;
}

/** The last order that a vehicle's agent gave. */
export type BodyOrder = Pick<Steer, 'heading_deg' | 'speed_mps' | 'depth_m'>;

export interface BodyTick {
  readonly truth: Truth;
  readonly index: number;
  readonly plan: VehiclePlan;
  readonly water: Water;
  readonly order: BodyOrder;
  /** True time at the start of the tick, and its length. */
  readonly timeS: number;
  readonly tickS: number;
  /** Two places for the tick's own use. */
  readonly scratch: Float64Array;
}

/** How a tick's way through the water runs: evenly turning, its speed falling from start to wanted. */
interface Run {
  readonly startRad: number;
  readonly turnRad: number;
  readonly startMps: number;
  readonly wantedMps: number;
  readonly lagS: number;
  readonly tickS: number;
}

/**
 * The way through the water, ∫ (w + d·e^(−s/lag))·e^(iθ(s)) ds with θ = θ0 + ωs, w the wanted speed and d
 * what is missing of it; north is the real part, east the imaginary. Written to `out` as east, north.
 */
function wayThroughWater(run: Run, out: Float64Array): void {
  const { startRad, turnRad, lagS, tickS } = run;
  const half = turnRad / 2;
  const chord = half > -1e-4 && half < 1e-4 ? 1 - (half * half) / 6 : Math.sin(half) / half;
  const steadyM = run.wantedMps * tickS * chord;
  out[0] = steadyM * Math.sin(startRad + half);
  out[1] = steadyM * Math.cos(startRad + half);
  const missingMps = run.startMps - run.wantedMps;
  if (missingMps === 0 || lagS <= 0) return;
  const kept = Math.exp(-tickS / lagS);
  const east = Math.sin(startRad) - kept * Math.sin(startRad + turnRad);
  const north = Math.cos(startRad) - kept * Math.cos(startRad + turnRad);
  const decayPerS = 1 / lagS;
  const turnRadps = turnRad / tickS;
  const scale = missingMps / (decayPerS * decayPerS + turnRadps * turnRadps);
  out[0]! += scale * (decayPerS * east + turnRadps * north);
  out[1]! += scale * (decayPerS * north - turnRadps * east);
}

/** Moves one vehicle of `truth` from the start of a tick to its end. */
export function moveBody(tick: BodyTick): void {
  const { truth, index, plan, order, tickS, scratch } = tick;
  const startRad = truth.headingRad[index]!;
  const startMps = truth.speedMps[index]!;
  const turnRad = turnOrdered(tick);
  const wantedMps = speedOrdered(tick);
  wayThroughWater({ startRad, turnRad, startMps, wantedMps, lagS: plan.speedLagS, tickS }, scratch);
  const wayEastM = scratch[0]!;
  const wayNorthM = scratch[1]!;
  const eastM = truth.eastM[index]!;
  const northM = truth.northM[index]!;
  const midEastM = eastM + (wayEastM + truth.currentEastMps[index]! * tickS) / 2;
  const midNorthM = northM + (wayNorthM + truth.currentNorthMps[index]! * tickS) / 2;
  currentAt(tick.water, { eastM: midEastM, northM: midNorthM, timeS: tick.timeS + tickS / 2 }, scratch);
  truth.eastM[index] = eastM + wayEastM + scratch[0]! * tickS;
  truth.northM[index] = northM + wayNorthM + scratch[1]! * tickS;
  truth.headingRad[index] = wrapped(startRad + turnRad);
  useEnergy(tick, speedAfter(tick, wantedMps, tickS / 2));
  truth.speedMps[index] = speedAfter(tick, wantedMps, tickS);
  const climbM = plan.climbMps * tickS;
  const depthM = truth.depthM[index]!;
  truth.depthM[index] = Math.max(0, depthM + clamp(order.depth_m - depthM, -climbM, climbM));
}

/** How far it turns in the tick; without charge not at all. */
function turnOrdered({ truth, index, plan, order, tickS }: BodyTick): number {
  if (truth.battery[index]! <= 0) return 0;
  const wantedRad = radFromDeg(order.heading_deg) - truth.compassBiasRad[index]!;
  const turnMost = plan.turnRateRadps * tickS;
  return clamp(turnBetween(truth.headingRad[index]!, wantedRad), -turnMost, turnMost);
}

/** The speed that the order comes to, within what it can do; without charge none. */
function speedOrdered({ truth, index, plan, order }: BodyTick): number {
  const ordered = order.speed_mps / (1 + truth.logScale[index]!);
  if (ordered <= 0 || truth.battery[index]! <= 0) return 0;
  return clamp(ordered, plan.speedMinMps, plan.speedMaxMps);
}

/** The speed a while into the tick. */
function speedAfter({ truth, index, plan }: BodyTick, wantedMps: number, whileS: number): number {
  if (plan.speedLagS <= 0) return wantedMps;
  return wantedMps + (truth.speedMps[index]! - wantedMps) * Math.exp(-whileS / plan.speedLagS);
}

/** P = hotel + cruise·(v/cruise speed)³ at the middle of the tick, as long as there is charge. */
function useEnergy({ truth, index, plan, tickS }: BodyTick, midMps: number): void {
  const ratio = midMps / plan.cruiseMps;
  const powerW = plan.powerHotelW + plan.powerCruiseW * ratio * ratio * ratio;
  const leftJ = plan.batteryJ - truth.energyJ[index]!;
  truth.energyJ[index]! += Math.min(leftJ, powerW * tickS);
  truth.battery[index] = Math.max(0, 1 - truth.energyJ[index]! / plan.batteryJ);
}
