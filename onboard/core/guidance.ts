/**
 * Where to go: from the picture (own place, the current here and along the loop, peers heard) to an
 * ordered heading, speed and depth, with the state and its reasons. One tick in order: the fleet's
 * common speed, the pattern of places, the state, the orders.
 */
import type { Frame } from '../../messages/frame.ts';
import type { Reason } from '../../messages/steer.ts';
import { commonSpeedMps } from './common-speed.ts';
import {
  isPlaced, NOT_STARTED, type Guidance, type GuidanceInput, type GuidanceOutput,
} from './guidance-memory.ts';
import { nearestPlace } from './loop.ts';
import { alignPattern, followFleet, movePattern, placePhase } from './pattern.ts';
import { isHeard, takeFrame } from './peers.ts';
import { steer } from './steering.ts';
import { changeState, isAtDepth } from './transitions.ts';

export { startGuidance, type Guidance, type GuidanceInput, type GuidanceOutput } from './guidance-memory.ts';

const RENEW_SPEED_S = 60;
/** The pattern follows the fleet in steps of at least this. */
const FOLLOW_S = 10;

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
  nearestPlace(guidance.loop, input.eastM, input.northM, at);
  if (memory.startedAtS === NOT_STARTED) {
    memory.startedAtS = input.atS;
    memory.beganDeep = isAtDepth(guidance, input);
    guidance.order.headingRad = input.headingRad - input.compassBiasRad;
  }
  renewSpeed(guidance, input);
  renewPattern(guidance, input);
  changeState(guidance, input);
  steer(guidance, input, out);
  out.state = memory.state;
  out.phase = memory.state === 'joining' ? placePhase(pattern, memory.place) : at.phase;
  giveReasons(guidance, input, out.reasons);
}

/** Before it has a place a vehicle takes the pattern from those that hold theirs; then it takes part. */
function renewPattern(guidance: Guidance, input: GuidanceInput): void {
  const { memory, pattern, peers, at, mission } = guidance;
  const { peerSilence_s: silenceS, patternFollow_s: followS } = mission.onboard;
  movePattern(pattern, input.atS);
  if (memory.state === 'waiting') {
    if (memory.newsSeen !== peers.news) alignPattern(pattern, peers, { atS: input.atS, silenceS });
    memory.newsSeen = peers.news;
    memory.followedAtS = input.atS;
    return;
  }
  const sinceS = input.atS - memory.followedAtS;
  if (sinceS < FOLLOW_S) return;
  memory.followedAtS = input.atS;
  const ownTurns = memory.state === 'holding' ? at.phase - placePhase(pattern, memory.place) : null;
  followFleet(pattern, peers, { atS: input.atS, silenceS, share: Math.min(1, sinceS / followS), ownTurns });
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

/** Why the state, then what is in trouble. */
function giveReasons(guidance: Guidance, input: GuidanceInput, reasons: Reason[]): void {
  const { memory, mission, order } = guidance;
  reasons.length = 0;
  reasons.push(memory.reason);
  if (order.overpowered) reasons.push('current-too-strong');
  const isWaiting = memory.state === 'waiting';
  if (!isPlaced(guidance, input)) reasons.push(isWaiting ? 'no-fix-yet' : 'position-uncertain');
  if (input.mapStale) reasons.push('map-stale');
  if (memory.batteryLow && memory.reason !== 'battery-low') reasons.push('battery-low');
  if (!isWaiting && isAlone(guidance, input)) reasons.push('alone');
  const { centre, radius_m: radiusM } = mission.keepIn;
  const east = input.eastM - centre.east_m;
  const north = input.northM - centre.north_m;
  if (east * east + north * north > radiusM * radiusM) reasons.push('outside-keep-in');
}

/** Whether a vehicle of a fleet has heard nobody for long. */
function isAlone(guidance: Guidance, input: GuidanceInput): boolean {
  const { peers, mission } = guidance;
  if (peers.count === 1) return false;
  const now = { atS: input.atS, silenceS: mission.onboard.peerSilence_s };
  for (let peer = 0; peer < peers.count; peer++) {
    if (peer !== guidance.selfIndex && isHeard(peers, peer, now)) return false;
  }
  return true;
}
