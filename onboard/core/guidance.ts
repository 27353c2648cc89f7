/**
 * Where to go: from the picture (own place, the current here and along the loop, peers heard) to an
 * ordered heading, speed and depth, with the state and its reasons.
 *
 * Joining goes straight for the meeting point with the own place of the moving pattern, each vehicle
 * in a depth layer of its own until it is there. Holding follows the line: the course is the tangent a
 * tick ahead, turned toward the line by atan(cross-track / converge distance); the speed along it is
 * the common one, corrected by how far the own place is ahead; the current is fed forward. Orders to
 * heading and speed are by compass and log, so the estimated errors of both are put in.
 */
import type { AgentState, Frame } from '../../messages/frame.ts';
import type { Mission } from '../../messages/mission.ts';
import type { Order } from '../../messages/sense.ts';
import type { Reason } from '../../messages/steer.ts';
import { wrapHalf, wrapRad } from './angle.ts';
import { commonSpeedMps, type SpeedRange } from './common-speed.ts';
import { groundSpeedMps, headingForCourse, orderForGround, type WaterOrder } from './course.ts';
import { mustTurnHome } from './energy.ts';
import { makeLoop, nearestPlace, pointAt, tangentRad, type Loop, type LoopPlace } from './loop.ts';
import { movePattern, placePhase, startPattern, turnsPerS, type Pattern } from './pattern.ts';
import { isHeard, startPeers, takeFrame, type Peers } from './peers.ts';
import { choosePlace, freePlace, isTaken, type PlaceQuestion } from './places.ts';
import { moveOn, type Event } from './states.ts';

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
  /** Own place on the loop; while joining, the place made for. */
  phase: number;
}

/** What changes from tick to tick. */
interface Memory {
  state: AgentState;
  reason: Reason;
  place: number;
  startedAtS: number;
  speedRenewedAtS: number;
  meetingS: number;
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
  readonly at: LoopPlace;
  readonly order: WaterOrder;
  readonly point: Float64Array;
  readonly memory: Memory;
}

const NOT_STARTED = -1e9;
const RENEW_SPEED_S = 60;
/** Vehicles that go home together keep this far apart, on a ring about the recovery place. */
const HOME_APART_M = 80;
const HOME_REACHED_M = 40;
/** Depth layers of joining vehicles: this far apart where the water above the loop allows it. */
const LAYER_M = 6;
const LAYER_TOP_M = 5;

export function startGuidance(mission: Mission): Guidance {
  const { self } = mission;
  const loop = makeLoop(mission.loop);
  const count = mission.fleet.length;
  const selfIndex = mission.fleet.findIndex(({ name }) => name === mission.vehicle);
  const range = { minMps: self.speedMin_mps, cruiseMps: self.cruise_mps, maxMps: self.speedMax_mps };
  const firstMps = Math.min(range.cruiseMps, (range.minMps + range.maxMps) / 2);
  const homeRingM = count === 1 ? 0 : (HOME_APART_M * count) / (2 * Math.PI);
  const homeRad = (2 * Math.PI * selfIndex) / count;
  const layerM = count === 1 ? 0 : Math.max(0, Math.min(LAYER_M, (mission.depth_m - LAYER_TOP_M) / (count - 1)));
  return {
    mission,
    loop,
    range,
    peers: startPeers(selfIndex, count),
    pattern: startPattern(mission.offsets, loop.lengthM, firstMps),
    selfIndex,
    homeEastM: mission.recovery.east_m + homeRingM * Math.sin(homeRad),
    homeNorthM: mission.recovery.north_m + homeRingM * Math.cos(homeRad),
    joiningDepthM: mission.depth_m - layerM * selfIndex,
    at: { phase: 0, crossTrackM: 0 },
    order: { headingRad: 0, speedMps: 0, overpowered: false },
    point: new Float64Array(2),
    memory: {
      state: 'waiting', reason: 'start', place: selfIndex, startedAtS: NOT_STARTED, speedRenewedAtS: NOT_STARTED,
      meetingS: 0, batteryLow: false, driftMostMps: 0,
    },
  };
}

/** Takes in what a peer says of itself; order and repetition do not matter. */
export function hearPeer(guidance: Guidance, frame: Frame, heardAtS: number): void {
  takeFrame(guidance.peers, frame, heardAtS);
}

export function isBatteryLow(guidance: Guidance): boolean {
  return guidance.memory.batteryLow;
}

/** One tick of guidance. */
export function guide(guidance: Guidance, input: GuidanceInput, out: GuidanceOutput): void {
  const { memory, pattern, at } = guidance;
  if (memory.startedAtS === NOT_STARTED) begin(guidance, input);
  nearestPlace(guidance.loop, input.eastM, input.northM, at);
  renewSpeed(guidance, input);
  const own = memory.state === 'holding' ? { phase: at.phase, place: memory.place } : null;
  const { peerSilence_s: silenceS, patternFollow_s: followS } = guidance.mission.onboard;
  movePattern(pattern, guidance.peers, { atS: input.atS, silenceS, followS, own });
  changeState(guidance, input);
  act(guidance, input, out);
  out.state = memory.state;
  out.phase = memory.state === 'joining' ? placePhase(pattern, memory.place) : at.phase;
  giveReasons(guidance, input, out.reasons);
}

/** The pattern begins by the clock: the same everywhere, whenever a vehicle wakes. */
function begin(guidance: Guidance, input: GuidanceInput): void {
  const { memory, pattern } = guidance;
  memory.startedAtS = input.atS;
  pattern.atS = 0;
  movePattern(pattern, guidance.peers, { atS: input.atS, silenceS: 0, followS: 1, own: null });
}

/** Renews the common speed from the currents along the loop, slowly. */
function renewSpeed(guidance: Guidance, input: GuidanceInput): void {
  const { memory, pattern } = guidance;
  if (input.atS - memory.speedRenewedAtS < RENEW_SPEED_S) return;
  const isFirst = memory.speedRenewedAtS === NOT_STARTED;
  memory.speedRenewedAtS = input.atS;
  const table = { east: input.loopCurrentEastMps, north: input.loopCurrentNorthMps };
  let most = 0;
  for (let point = 0; point < table.east.length; point++) {
    most = Math.max(most, Math.sqrt(table.east[point]! ** 2 + table.north[point]! ** 2));
  }
  memory.driftMostMps = most;
  if (isFirst) return;
  const wanted = commonSpeedMps(guidance.loop, guidance.range, table);
  const share = Math.min(1, RENEW_SPEED_S / guidance.mission.onboard.commonSpeedTime_s);
  pattern.speedMps += (wanted - pattern.speedMps) * share;
}

function changeState(guidance: Guidance, input: GuidanceInput): void {
  const { memory } = guidance;
  memory.batteryLow = mustTurnHome(guidance.mission.self, input.battery, {
    distanceM: distanceHomeM(guidance, input),
    driftMps: memory.driftMostMps,
    reserve: guidance.mission.onboard.batteryReserve,
  });
  for (const order of input.orders) {
    apply(guidance, order === 'surface' ? 'order-surface' : order === 'home' ? 'order-home' : 'order-hold');
  }
  if (memory.batteryLow) apply(guidance, 'battery-low');
  switch (memory.state) {
    case 'waiting':
      if (isReady(guidance, input)) {
        memory.place = choosePlace(questionOf(guidance, input));
        apply(guidance, 'ready');
      }
      return;
    case 'joining':
      keepClaim(guidance, input);
      if (isInPlace(guidance)) apply(guidance, 'in-place');
      return;
    case 'holding':
      if (Math.abs(guidance.at.crossTrackM) > guidance.mission.onboard.letGo_m) apply(guidance, 'off-the-loop');
      return;
    case 'homing':
      if (distanceHomeM(guidance, input) < HOME_REACHED_M) apply(guidance, 'arrived');
      return;
    case 'surfacing':
      return;
  }
}

function apply(guidance: Guidance, event: Event): void {
  const { memory } = guidance;
  const move = moveOn(memory.state, event);
  if (move === null) return;
  memory.state = move.to;
  memory.reason = move.reason;
  memory.meetingS = 0;
}

/** Ready to join: every peer was heard, or two rounds of slots have gone by. */
function isReady(guidance: Guidance, input: GuidanceInput): boolean {
  const { peers, mission, memory } = guidance;
  const roundS = mission.fleet.length * mission.modem.slot_s;
  if (input.atS - memory.startedAtS >= 2 * roundS + input.tickS) return true;
  const now = { atS: input.atS, silenceS: 2 * roundS };
  for (let peer = 0; peer < peers.count; peer++) {
    if (peer !== guidance.selfIndex && !isHeard(peers, peer, now)) return false;
  }
  return true;
}

function questionOf(guidance: Guidance, input: GuidanceInput): PlaceQuestion {
  return {
    loop: guidance.loop,
    pattern: guidance.pattern,
    peers: guidance.peers,
    self: { eastM: input.eastM, northM: input.northM, speedMps: guidance.range.maxMps },
    atS: input.atS,
    silenceS: guidance.mission.onboard.peerSilence_s,
  };
}

/** Gives way on a place that a peer with the better right claims. */
function keepClaim(guidance: Guidance, input: GuidanceInput): void {
  const { memory } = guidance;
  const question = questionOf(guidance, input);
  if (isTaken(question, memory.place, false)) memory.place = freePlace(question, memory.place);
}

function isInPlace(guidance: Guidance): boolean {
  const { at, pattern, memory, loop, mission } = guidance;
  const offM = Math.abs(wrapHalf(at.phase - placePhase(pattern, memory.place))) * loop.lengthM;
  const gapM = loop.lengthM / mission.offsets.length;
  return Math.abs(at.crossTrackM) < mission.onboard.takeHold_m
    && offM < Math.min(2 * mission.onboard.takeHold_m, gapM / 4);
}

function distanceHomeM(guidance: Guidance, input: GuidanceInput): number {
  const east = guidance.homeEastM - input.eastM;
  const north = guidance.homeNorthM - input.northM;
  return Math.sqrt(east * east + north * north);
}

/** Writes heading, speed and depth for the state. */
function act(guidance: Guidance, input: GuidanceInput, out: GuidanceOutput): void {
  const { order, memory, mission } = guidance;
  order.overpowered = false;
  switch (memory.state) {
    case 'waiting':
      order.headingRad = wrapRad(input.headingRad - input.compassBiasRad);
      order.speedMps = 0;
      out.depthM = guidance.joiningDepthM;
      break;
    case 'joining':
      join(guidance, input);
      out.depthM = guidance.joiningDepthM;
      break;
    case 'holding':
      follow(guidance, input);
      out.depthM = mission.depth_m;
      break;
    case 'homing':
      goTo(guidance, input, { eastM: guidance.homeEastM, northM: guidance.homeNorthM, speedMps: guidance.range.cruiseMps });
      out.depthM = guidance.joiningDepthM;
      break;
    case 'surfacing':
      order.headingRad = wrapRad(input.headingRad - input.compassBiasRad);
      order.speedMps = 0;
      out.depthM = 0;
      break;
  }
  out.headingRad = order.headingRad + input.compassBiasRad;
  out.speedMps = order.speedMps * (1 + input.logScale);
}

/** Heads for a point at a speed through the water. */
function goTo(guidance: Guidance, input: GuidanceInput, target: { eastM: number; northM: number; speedMps: number }): void {
  const courseRad = Math.atan2(target.eastM - input.eastM, target.northM - input.northM);
  const current = { eastMps: input.currentEastMps, northMps: input.currentNorthMps };
  guidance.order.headingRad = wrapRad(headingForCourse(courseRad, target.speedMps, current));
  guidance.order.speedMps = target.speedMps;
  guidance.order.overpowered = groundSpeedMps(courseRad, target.speedMps, current) <= 0;
}

/** Heads for where the own place will be when the vehicle is there. */
function join(guidance: Guidance, input: GuidanceInput): void {
  const { pattern, loop, memory, point, range } = guidance;
  const current = { eastMps: input.currentEastMps, northMps: input.currentNorthMps };
  for (let round = 0; round < 3; round++) {
    pointAt(loop, placePhase(pattern, memory.place) + turnsPerS(pattern) * memory.meetingS, point);
    const east = point[0]! - input.eastM;
    const north = point[1]! - input.northM;
    const groundMps = Math.max(range.minMps / 2, groundSpeedMps(Math.atan2(east, north), range.maxMps, current));
    memory.meetingS = Math.sqrt(east * east + north * north) / groundMps;
  }
  goTo(guidance, input, { eastM: point[0]!, northM: point[1]!, speedMps: range.maxMps });
}

/** Follows the line in the own place. */
function follow(guidance: Guidance, input: GuidanceInput): void {
  const { pattern, loop, memory, at, range, order, mission } = guidance;
  const { converge_m: convergeM, placeTime_s: placeTimeS, speedCorrection_mps: most } = mission.onboard;
  const aheadTurns = turnsPerS(pattern) * input.tickS;
  const courseRad = tangentRad(loop, at.phase + aheadTurns) - Math.atan(at.crossTrackM / convergeM);
  const behindM = wrapHalf(placePhase(pattern, memory.place) - at.phase) * loop.lengthM;
  const correction = Math.min(most, Math.max(-most, behindM / placeTimeS));
  const current = { eastMps: input.currentEastMps, northMps: input.currentNorthMps };
  orderForGround({
    courseRad,
    groundMps: Math.max(0, pattern.speedMps + correction),
    minMps: range.minMps,
    maxMps: range.maxMps,
  }, current, order);
}

function giveReasons(guidance: Guidance, input: GuidanceInput, reasons: Reason[]): void {
  const { memory, mission, peers, order } = guidance;
  reasons.length = 0;
  reasons.push(memory.reason);
  if (order.overpowered) reasons.push('current-too-strong');
  if (input.positionSigmaM > mission.onboard.positionUncertain_m) reasons.push('position-uncertain');
  if (input.mapStale) reasons.push('map-stale');
  if (memory.batteryLow && memory.reason !== 'battery-low') reasons.push('battery-low');
  let heard = false;
  const now = { atS: input.atS, silenceS: mission.onboard.peerSilence_s };
  for (let peer = 0; peer < peers.count; peer++) heard ||= peer !== guidance.selfIndex && isHeard(peers, peer, now);
  if (!heard && peers.count > 1 && memory.state !== 'waiting') reasons.push('alone');
  const { centre, radius_m: radiusM } = mission.keepIn;
  const east = input.eastM - centre.east_m;
  const north = input.northM - centre.north_m;
  if (east * east + north * north > radiusM * radiusM) reasons.push('outside-keep-in');
}
