/**
 * Who takes which place, without a leader. Each vehicle reckons how soon each vehicle it has heard of
 * could meet each place, and takes the way of giving out places that has the least sum of squared
 * times, which also keeps straight ways from crossing: the same numbers give the same answer
 * everywhere. What loss leaves different is settled by claims: a vehicle on its way says the phase of
 * the place it makes for; of two on one place the one that holds it keeps it, else the lower in fleet order.
 */
import { wrapHalf } from './angle.ts';
import { assignColumns } from './assign.ts';
import { pointAt, type Loop } from './loop.ts';
import { nearestPattern, placePhase, turnsPerS, type Pattern } from './pattern.ts';
import { isHeard, peerPhase, peerState, type Peers } from './peers.ts';

/** Rounds of the meeting-time iteration; each shrinks the error by about the ratio of speeds. */
const MEETING_ROUNDS = 24;
/** Two phases closer than this share of the smallest gap are one place. */
const SAME_PLACE_SHARE = 0.45;
/** A holder this near, as a share of the mean gap, is beside this vehicle. */
const BESIDE_SHARE = 0.25;

export interface Vehicle {
  readonly eastM: number;
  readonly northM: number;
  readonly speedMps: number;
}

/** Time until a vehicle that heads straight for it meets a place that moves with the pattern. */
export function meetingS(loop: Loop, pattern: Pattern, place: number, vehicle: Vehicle): number {
  const point = new Float64Array(2);
  let timeS = 0;
  for (let round = 0; round < MEETING_ROUNDS; round++) {
    pointAt(loop, placePhase(pattern, place) + turnsPerS(pattern) * timeS, point);
    const east = point[0]! - vehicle.eastM;
    const north = point[1]! - vehicle.northM;
    timeS = Math.sqrt(east * east + north * north) / vehicle.speedMps;
  }
  return timeS;
}

export interface PlaceQuestion {
  readonly loop: Loop;
  readonly pattern: Pattern;
  readonly peers: Peers;
  readonly self: Vehicle;
  /** Own place on the loop. */
  readonly ownPhase: number;
  readonly atS: number;
  readonly silenceS: number;
}

/** The place of this vehicle in the assignment of all vehicles heard. */
export function choosePlace(question: PlaceQuestion): number {
  const { peers, self } = question;
  const count = peers.count;
  const costs = new Float64Array(count * count);
  for (let vehicle = 0; vehicle < count; vehicle++) {
    const known = vehicle === peers.selfIndex || isHeard(peers, vehicle, question);
    if (!known) continue;
    const from = vehicle === peers.selfIndex
      ? self
      : { eastM: peers.eastM[vehicle]!, northM: peers.northM[vehicle]!, speedMps: self.speedMps };
    for (let place = 0; place < count; place++) {
      costs[vehicle * count + place] = meetingS(question.loop, question.pattern, place, from) ** 2;
    }
  }
  return assignColumns(costs, count)[peers.selfIndex]!;
}

/** The place that a peer holds or makes for, or −1 if it says nothing of one. */
function claimOf(question: PlaceQuestion, peer: number): number {
  const { peers, pattern } = question;
  if (peer === peers.selfIndex || !isHeard(peers, peer, question)) return -1;
  const state = peerState(peers, peer);
  if (state !== 'joining' && state !== 'holding') return -1;
  const phase = peerPhase(peers, peer, question.atS, turnsPerS(pattern));
  const place = nearestPattern(pattern, phase);
  const off = Math.abs(wrapHalf(phase - placePhase(pattern, place)));
  return off <= SAME_PLACE_SHARE / pattern.offsets.length ? place : -1;
}

/**
 * Whether a peer with the better right is on `place`. For a vehicle that holds, only a holder that is
 * really beside it: gaps that breathe in strong drift must not look like two on one place.
 */
export function isTaken(question: PlaceQuestion, place: number, holding: boolean): boolean {
  const { peers, pattern } = question;
  for (let peer = 0; peer < peers.count; peer++) {
    if (claimOf(question, peer) !== place) continue;
    const peerHolds = peerState(peers, peer) === 'holding';
    if (!holding) {
      if (peerHolds || peer < peers.selfIndex) return true;
    } else if (peerHolds && peer < peers.selfIndex) {
      const phase = peerPhase(peers, peer, question.atS, turnsPerS(pattern));
      if (Math.abs(wrapHalf(phase - question.ownPhase)) < BESIDE_SHARE / pattern.offsets.length) return true;
    }
  }
  return false;
}

/** The free place that is soonest met; the present one if all are claimed. */
export function freePlace(question: PlaceQuestion, present: number): number {
  const { peers, pattern } = question;
  let best = present;
  let bestS = Infinity;
  for (let place = 0; place < pattern.offsets.length; place++) {
    let free = true;
    for (let peer = 0; peer < peers.count; peer++) {
      if (claimOf(question, peer) === place) free = false;
    }
    if (!free) continue;
    const timeS = meetingS(question.loop, pattern, place, question.self);
    if (timeS < bestS) {
      best = place;
      bestS = timeS;
    }
  }
  return best;
}
