/**
 * What guidance is told each tick, what it answers, and all that it remembers between ticks. Sized at
 * start; nothing in it grows. Angles are radians clockwise from north, depths grow downward.
 */
import { assert } from '../../messages/assert.ts';
import type { AgentState } from '../../messages/frame.ts';
import type { Mission } from '../../messages/mission.ts';
import type { Order } from '../../messages/sense.ts';
import type { Reason } from '../../messages/steer.ts';
import type { SpeedRange } from './common-speed.ts';
import type { WaterOrder } from './course.ts';
import { homePoint, joiningDepthM } from './layers.ts';
import { makeLoop, type Loop, type LoopPlace } from './loop.ts';
import { startPattern, type Pattern } from './pattern.ts';
import { startPeers, type Peers } from './peers.ts';
import { startTraffic, type Traffic } from './traffic.ts';

/** Caller-owned, renewed every tick. */
export interface GuidanceInput {
  atS: number;
  tickS: number;
  eastM: number;
  northM: number;
  depthM: number;
  positionSigmaM: number;
  compassBiasRad: number;
  logScale: number;
  /** Compass. */
  headingRad: number;
  /** Log. */
  speedMps: number;
  /** Share of full. */
  battery: number;
  currentEastMps: number;
  currentNorthMps: number;
  /** At phases 0/64 … 63/64, renewed each minute. */
  loopCurrentEastMps: Float64Array;
  loopCurrentNorthMps: Float64Array;
  currentSigmaMps: number;
  mapStale: boolean;
  orders: readonly Order[];
}

/** Caller-owned, written every tick. */
export interface GuidanceOutput {
  /** Ordered, by compass. */
  headingRad: number;
  /** Ordered, by log. */
  speedMps: number;
  depthM: number;
  state: AgentState;
  reasons: Reason[];
  /** What the next frame says: the own place on the loop; while joining, the place made for. */
  phase: number;
}

/** What changes from tick to tick. */
export interface Memory {
  state: AgentState;
  /** Why it is in that state. */
  reason: Reason;
  /** Index into the mission's offsets. */
  place: number;
  startedAtS: number;
  speedRenewedAtS: number;
  /** Time to which the pattern has followed the fleet. */
  followedAtS: number;
  /** Time until the own place is met, while joining. */
  meetingS: number;
  /** Whether the agent began at the fleet's depth, as after a restart, and is on the way it was on then. */
  beganDeep: boolean;
  /** Frames taken in when the claims were last looked at. */
  newsSeen: number;
  /** Time of the last change of state. */
  changedAtS: number;
  /** Whether it may leave the layer of joining for the depth of the line. */
  mayDescend: boolean;
  batteryLow: boolean;
  driftMostMps: number;
}

export interface Guidance {
  readonly mission: Mission;
  readonly loop: Loop;
  readonly range: SpeedRange;
  readonly peers: Peers;
  readonly pattern: Pattern;
  readonly selfIndex: number;
  readonly homeEastM: number;
  readonly homeNorthM: number;
  readonly joiningDepthM: number;
  /** Where the vehicle is, seen from the loop, by its own estimate. */
  readonly at: LoopPlace;
  readonly order: WaterOrder;
  readonly point: Float64Array;
  readonly traffic: Traffic;
  readonly memory: Memory;
}

export const NOT_STARTED = -1e9;

/** Guidance of a vehicle that has perceived nothing yet. */
export function startGuidance(mission: Mission): Guidance {
  const { self, fleet } = mission;
  const selfIndex = fleet.findIndex(({ name }) => name === mission.vehicle);
  assert(selfIndex >= 0, 'a vehicle is of its own fleet');
  assert(mission.offsets.length === fleet.length, 'the pattern has one place a vehicle');
  const loop = makeLoop(mission.loop);
  const range = { minMps: self.speedMin_mps, cruiseMps: self.cruise_mps, maxMps: self.speedMax_mps };
  const middleMps = (range.minMps + range.maxMps) / 2;
  const home = homePoint(mission, selfIndex);
  return {
    mission,
    loop,
    range,
    peers: startPeers(selfIndex, fleet.length),
    pattern: startPattern(mission.offsets, loop.lengthM, Math.min(range.cruiseMps, middleMps)),
    selfIndex,
    homeEastM: home.eastM,
    homeNorthM: home.northM,
    joiningDepthM: joiningDepthM(mission.depth_m, selfIndex),
    at: { phase: 0, crossTrackM: 0 },
    order: { headingRad: 0, speedMps: 0, overpowered: false },
    point: new Float64Array(2),
    traffic: startTraffic(fleet.length),
    memory: {
      state: 'waiting', reason: 'start', place: selfIndex, startedAtS: NOT_STARTED,
      speedRenewedAtS: NOT_STARTED, followedAtS: 0, meetingS: 0, beganDeep: false, newsSeen: 0, changedAtS: 0,
      mayDescend: false, batteryLow: false, driftMostMps: 0,
    },
  };
}

/** Whether the own position is known well enough to go anywhere by it. */
export function isPlaced(guidance: Guidance, input: GuidanceInput): boolean {
  return input.positionSigmaM <= guidance.mission.onboard.positionUncertain_m;
}

/** Distance to the vehicle's own point at the recovery place. */
export function distanceHomeM(guidance: Guidance, input: GuidanceInput): number {
  const east = guidance.homeEastM - input.eastM;
  const north = guidance.homeNorthM - input.northM;
  return Math.sqrt(east * east + north * north);
}
