/**
 * Keeping clear of vehicles that share the own depth layer. From what peers last said, each is taken to
 * go on as the rules of joining say: a joiner straight for its place at full speed, a holder along the
 * line. The lower in fleet order goes first and a holder always does; who gives way takes, of a few
 * courses and two speeds, the first whose closest approach is far enough, else the one that is farthest.
 * (The velocity obstacle of robotics, sampled.)
 */
import { groundSpeedMps, type Current } from './course.ts';
import type { Guidance, GuidanceInput } from './guidance-memory.ts';
import { joiningDepthM } from './layers.ts';
import { pointAt, tangentRad } from './loop.ts';
import { turnsPerS } from './pattern.ts';
import { isHeard, peerPhase, peerState } from './peers.ts';
import type { Traffic } from './traffic.ts';

/** Closest approach that is far enough: 30 m, and what may be wrong with a prediction a minute old. */
const CLEAR_M = 90;
/** No further ahead than this; predictions are not worth more. */
const HORIZON_S = 240;
const SAME_LAYER_M = 5;
const MEETING_ROUNDS = 6;
/** Turns off the straight course, each with a speed: 0 the least, 1 the greatest. The least change first. */
const CHOICES: readonly (readonly [number, number])[] = [
  [0, 1], [0.35, 1], [-0.35, 1], [0, 0], [0.7, 1], [-0.7, 1],
  [0.35, 0], [-0.35, 0], [1.2, 1], [-1.2, 1], [1.2, 0], [-1.2, 0],
];

/** Turns the joining order in `guidance.order` aside if it would come too near to another of the layer. */
export function keepClear(guidance: Guidance, input: GuidanceInput): void {
  lookRound(guidance, input);
  const { traffic, order, range } = guidance;
  if (traffic.count === 0) return;
  const straightRad = order.headingRad;
  let bestM = -1;
  for (const [turnRad, share] of CHOICES) {
    const headingRad = straightRad + turnRad;
    const speedMps = range.minMps + (range.maxMps - range.minMps) * share;
    const closestM = closestApproachM(traffic, input, {
      eastMps: speedMps * Math.sin(headingRad) + input.currentEastMps,
      northMps: speedMps * Math.cos(headingRad) + input.currentNorthMps,
    });
    if (closestM <= bestM) continue;
    bestM = closestM;
    order.headingRad = headingRad;
    order.speedMps = speedMps;
    if (closestM >= CLEAR_M) return;
  }
}

function closestApproachM(traffic: Traffic, input: GuidanceInput, own: Current): number {
  let least = Infinity;
  for (let index = 0; index < traffic.count; index++) {
    const east = traffic.eastM[index]! - input.eastM;
    const north = traffic.northM[index]! - input.northM;
    const eastMps = traffic.eastMps[index]! - own.eastMps;
    const northMps = traffic.northMps[index]! - own.northMps;
    const squared = eastMps * eastMps + northMps * northMps;
    const closing = squared > 0 ? -(east * eastMps + north * northMps) / squared : 0;
    const timeS = Math.min(HORIZON_S, Math.max(0, closing));
    const thenEast = east + eastMps * timeS;
    const thenNorth = north + northMps * timeS;
    least = Math.min(least, thenEast * thenEast + thenNorth * thenNorth);
  }
  return Math.sqrt(least);
}

/** Gathers those of the layer that go first. */
function lookRound(guidance: Guidance, input: GuidanceInput): void {
  const { peers, mission, traffic, selfIndex } = guidance;
  const now = { atS: input.atS, silenceS: mission.onboard.peerSilence_s };
  traffic.count = 0;
  for (let peer = 0; peer < peers.count; peer++) {
    if (peer === selfIndex || !isHeard(peers, peer, now)) continue;
    const depthM = joiningDepthM(mission.depth_m, peer);
    if (Math.abs(depthM - guidance.joiningDepthM) > SAME_LAYER_M) continue;
    const state = peerState(peers, peer);
    if (state === 'holding') addHolder(guidance, input, peer);
    else if (state === 'joining' && peer < selfIndex) addJoiner(guidance, input, peer);
  }
}

function addHolder(guidance: Guidance, input: GuidanceInput, peer: number): void {
  const { peers, pattern, loop, point, traffic } = guidance;
  const phase = peerPhase(peers, peer, input.atS, turnsPerS(pattern));
  pointAt(loop, phase, point);
  const courseRad = tangentRad(loop, phase);
  const at = traffic.count++;
  traffic.eastM[at] = point[0]!;
  traffic.northM[at] = point[1]!;
  traffic.eastMps[at] = pattern.speedMps * Math.sin(courseRad);
  traffic.northMps[at] = pattern.speedMps * Math.cos(courseRad);
}

function addJoiner(guidance: Guidance, input: GuidanceInput, peer: number): void {
  const { peers, pattern, loop, point, traffic, range } = guidance;
  const current = { eastMps: input.currentEastMps, northMps: input.currentNorthMps };
  const fromEast = peers.eastM[peer]!;
  const fromNorth = peers.northM[peer]!;
  let meetingS = 0;
  let east = 0;
  let north = 0;
  for (let round = 0; round < MEETING_ROUNDS; round++) {
    pointAt(loop, peers.phase[peer]! + turnsPerS(pattern) * meetingS, point);
    east = point[0]! - fromEast;
    north = point[1]! - fromNorth;
    const groundMps = groundSpeedMps(Math.atan2(east, north), range.maxMps, current);
    meetingS = Math.sqrt(east * east + north * north) / Math.max(range.minMps / 2, groundMps);
  }
  // At most as far as its place: there it becomes a holder.
  const sinceS = Math.min(input.atS - peers.atS[peer]!, meetingS);
  const at = traffic.count++;
  traffic.eastMps[at] = meetingS > 0 ? east / meetingS : 0;
  traffic.northMps[at] = meetingS > 0 ? north / meetingS : 0;
  traffic.eastM[at] = fromEast + traffic.eastMps[at]! * sinceS;
  traffic.northM[at] = fromNorth + traffic.northMps[at]! * sinceS;
}
