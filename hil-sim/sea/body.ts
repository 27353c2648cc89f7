/**
 * One vehicle's motion for one tick: it turns toward its ordered heading at no more than its turn
 * rate, its speed follows the order with a first-order lag, its depth at no more than its climb, and
 * the water carries it. It steers by its own instruments: an order is met when compass and log read
 * it, so the true heading carries the compass bias and the true speed the log's scale.
 *
 * Position is integrated by the midpoint rule: the error of a tick is of third order in its length
 * (below 0.1 mm at 1 s, 5 deg/s and currents that turn in minutes).
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
  /** Two places for the current at the middle of the tick. */
  readonly scratch: Float64Array;
}

/** Moves one vehicle of `truth` from the start of a tick to its end. */
export function moveBody(tick: BodyTick): void {
  const { truth, index, plan, order, tickS, scratch } = tick;
  const alive = truth.battery[index]! > 0;
  const headingRad = truth.headingRad[index]!;
  const wantedRad = radFromDeg(order.heading_deg) - truth.compassBiasRad[index]!;
  const turnMost = plan.turnRateRadps * tickS;
  const turnRad = alive ? clamp(turnBetween(headingRad, wantedRad), -turnMost, turnMost) : 0;
  const speedMps = truth.speedMps[index]!;
  const ordered = order.speed_mps / (1 + truth.logScale[index]!);
  const wantedMps = alive ? (ordered <= 0 ? 0 : clamp(ordered, plan.speedMinMps, plan.speedMaxMps)) : 0;
  const kept = plan.speedLagS > 0 ? Math.exp(-tickS / plan.speedLagS) : 0;
  const keptHalf = plan.speedLagS > 0 ? Math.exp(-tickS / 2 / plan.speedLagS) : 0;
  const midMps = wantedMps + (speedMps - wantedMps) * keptHalf;
  const midRad = headingRad + turnRad / 2;
  const waterEast = midMps * Math.sin(midRad);
  const waterNorth = midMps * Math.cos(midRad);
  const midEastM = truth.eastM[index]! + (waterEast + truth.currentEastMps[index]!) * (tickS / 2);
  const midNorthM = truth.northM[index]! + (waterNorth + truth.currentNorthMps[index]!) * (tickS / 2);
  currentAt(tick.water, { eastM: midEastM, northM: midNorthM, timeS: tick.timeS + tickS / 2 }, scratch);
  truth.eastM[index]! += (waterEast + scratch[0]!) * tickS;
  truth.northM[index]! += (waterNorth + scratch[1]!) * tickS;
  const newRad = (headingRad + turnRad) % TURN;
  truth.headingRad[index] = newRad < 0 ? newRad + TURN : newRad;
  truth.speedMps[index] = wantedMps + (speedMps - wantedMps) * kept;
  const climbM = plan.climbMps * tickS;
  const depthM = truth.depthM[index]!;
  truth.depthM[index] = Math.max(0, depthM + clamp(order.depth_m - depthM, -climbM, climbM));
  useEnergy(truth, index, { plan, midMps, tickS });
}

/** P = hotel + cruise·(v/cruise speed)³, as long as there is charge. */
function useEnergy(truth: Truth, index: number, use: { plan: VehiclePlan; midMps: number; tickS: number }): void {
  const { plan, midMps, tickS } = use;
  const powerW = plan.powerHotelW + plan.powerCruiseW * (midMps / plan.cruiseMps) ** 3;
  const leftJ = plan.batteryJ - truth.energyJ[index]!;
  truth.energyJ[index]! += Math.min(leftJ, powerW * tickS);
  truth.battery[index] = Math.max(0, 1 - truth.energyJ[index]! / plan.batteryJ);
}
