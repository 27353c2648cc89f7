/**
 * What moves an agent from state to state: orders, charge, having heard the fleet, being in place,
 * being off the line, a peer with the better right to its place. The table itself is in states.ts.
 */
import { wrapHalf } from './angle.ts';
import { mustTurnHome } from './energy.ts';
import {
  distanceHomeM, isPlaced, type Guidance, type GuidanceInput, type Memory,
} from './guidance-memory.ts';
import { placePhase } from './pattern.ts';
import { isHeard, peerState } from './peers.ts';
import { choosePlace, freePlace, isTaken, type PlaceQuestion } from './places.ts';
import { moveOn, type Event } from './states.ts';

/** Home, and at the layer of joining, is within so much. */
export const HOME_REACHED_M = 30;
const DEPTH_REACHED_M = 1;
/** A vehicle that begins this near the line's depth was at work there. */
const AT_DEPTH_M = 3;
/** Rounds of slots that a vehicle listens for the fleet before it goes. */
const LISTEN_ROUNDS = 4;
/** A vehicle that holds waits no longer than this for the others to be in their places. */
const LAYER_WAIT_S = 1200;

/** Whether the vehicle is at the fleet's depth. */
export function isAtDepth(guidance: Guidance, input: GuidanceInput): boolean {
  return Math.abs(input.depthM - guidance.mission.depth_m) < AT_DEPTH_M;
}

/** Whether it began at work and is, as far as it knows, still near the line. */
export function isOnStation(guidance: Guidance, input: GuidanceInput): boolean {
  const { memory, at, mission } = guidance;
  if (!memory.beganDeep) return false;
  return !isPlaced(guidance, input) || Math.abs(at.crossTrackM) < mission.onboard.letGo_m;
}

/** Applies whatever has happened by this tick. */
export function changeState(guidance: Guidance, input: GuidanceInput): void {
  const { memory, mission, at } = guidance;
  memory.batteryLow = mustTurnHome(mission.self, input.battery, {
    distanceM: distanceHomeM(guidance, input),
    driftMps: memory.driftMostMps,
    reserve: mission.onboard.batteryReserve,
  });
  for (const order of input.orders) {
    const event = order === 'surface' ? 'order-surface' : order === 'home' ? 'order-home' : 'order-hold';
    apply(memory, event, input.atS);
  }
  if (memory.batteryLow) apply(memory, 'battery-low', input.atS);
  switch (memory.state) {
    case 'waiting':
      if (isReady(guidance, input)) makeReady(guidance, input);
      return;
    case 'joining':
      keepPlace(guidance, input);
      if (isInPlace(guidance)) apply(memory, 'in-place', input.atS);
      return;
    case 'holding':
      if (Math.abs(at.crossTrackM) > mission.onboard.letGo_m) apply(memory, 'off-the-loop', input.atS);
      else keepPlace(guidance, input);
      memory.mayDescend ||= isWayDownClear(guidance, input);
      return;
    case 'homing':
      if (distanceHomeM(guidance, input) < HOME_REACHED_M) apply(memory, 'arrived', input.atS);
      return;
    case 'surfacing':
      return;
  }
}

function apply(memory: Memory, event: Event, atS: number): void {
  const move = moveOn(memory.state, event);
  if (move === null) return;
  memory.state = move.to;
  memory.reason = move.reason;
  memory.meetingS = 0;
  memory.changedAtS = atS;
  memory.mayDescend = memory.beganDeep && event === 'in-place';
  memory.beganDeep &&= event === 'ready';
}

/** Ready to join: it knows its place, is in its layer, and has heard every peer or listened for some rounds. */
function isReady(guidance: Guidance, input: GuidanceInput): boolean {
  if (!isPlaced(guidance, input)) return false;
  const { mission, memory } = guidance;
  const waitedS = input.atS - memory.startedAtS;
  const listenS = LISTEN_ROUNDS * mission.fleet.length * mission.modem.slot_s;
  const diveS = (2 * mission.depth_m) / mission.self.climb_mps;
  const isInLayer = Math.abs(input.depthM - guidance.joiningDepthM) < DEPTH_REACHED_M;
  const isDeep = isOnStation(guidance, input) || isInLayer || waitedS > diveS;
  return isDeep && (waitedS >= listenS + input.tickS || areAllHeard(guidance, input, listenS));
}

function areAllHeard(guidance: Guidance, input: GuidanceInput, silenceS: number): boolean {
  const { peers } = guidance;
  const now = { atS: input.atS, silenceS };
  for (let peer = 0; peer < peers.count; peer++) {
    if (peer !== guidance.selfIndex && !isHeard(peers, peer, now)) return false;
  }
  return true;
}

function makeReady(guidance: Guidance, input: GuidanceInput): void {
  const question = questionOf(guidance, input);
  const place = choosePlace(question);
  const { memory } = guidance;
  memory.place = isTaken(question, place, false) ? freePlace(question, place) : place;
  apply(memory, 'ready', input.atS);
}

function questionOf(guidance: Guidance, input: GuidanceInput): PlaceQuestion {
  return {
    loop: guidance.loop,
    pattern: guidance.pattern,
    peers: guidance.peers,
    self: { eastM: input.eastM, northM: input.northM, speedMps: guidance.range.maxMps },
    ownPhase: guidance.at.phase,
    atS: input.atS,
    silenceS: guidance.mission.onboard.peerSilence_s,
  };
}

/** Gives way on a place that a peer with the better right claims; only news can change that. */
function keepPlace(guidance: Guidance, input: GuidanceInput): void {
  const { memory, peers } = guidance;
  if (memory.newsSeen === peers.news) return;
  memory.newsSeen = peers.news;
  const question = questionOf(guidance, input);
  const isHolding = memory.state === 'holding';
  if (!isTaken(question, memory.place, isHolding)) return;
  const place = freePlace(question, memory.place);
  if (place === memory.place) return;
  memory.place = place;
  if (isHolding) apply(memory, 'place-taken', input.atS);
}

/** Whether the whole fleet is heard and none of it is on its way; or that was waited for long enough. */
function isWayDownClear(guidance: Guidance, input: GuidanceInput): boolean {
  const { peers, mission, memory } = guidance;
  if (input.atS - memory.changedAtS > LAYER_WAIT_S) return true;
  if (!areAllHeard(guidance, input, mission.onboard.peerSilence_s)) return false;
  for (let peer = 0; peer < peers.count; peer++) {
    if (peer === guidance.selfIndex) continue;
    const state = peerState(peers, peer);
    if (state === 'waiting' || state === 'joining') return false;
  }
  return true;
}

function isInPlace(guidance: Guidance): boolean {
  const { at, pattern, memory, loop, mission } = guidance;
  const offM = Math.abs(wrapHalf(at.phase - placePhase(pattern, memory.place))) * loop.lengthM;
  const gapM = loop.lengthM / mission.offsets.length;
  return Math.abs(at.crossTrackM) < mission.onboard.takeHold_m
    && offM < Math.min(2 * mission.onboard.takeHold_m, gapM / 4);
}
