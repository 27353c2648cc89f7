/**
 * The pattern of places that moves round the loop, without a leader. Every vehicle carries the
 * pattern's phase itself: it moves on with the fleet's common speed and is drawn toward what the
 * vehicles in their places, itself included, show of it. All begin from the same rule of the clock, so
 * that fleets agree before anyone is heard, and keep agreeing through silence.
 *
 * The place of a vehicle is an index into the mission's offsets. A vehicle on its way claims the place
 * it makes for: its frames carry that place's phase. Two claims on one place end by rank: whoever holds
 * beats whoever joins, then the lower in fleet order keeps it.
 */
import { wrapHalf, wrapTurns } from './angle.ts';
import { isHeard, peerPhase, peerState, type Peers } from './peers.ts';

/** Weight of staying near the present pattern: enough to choose among equals, no more. */
const NEAR_WEIGHT = 1e-6;

export interface Pattern {
  readonly offsets: Float64Array;
  readonly lengthM: number;
  /** Phase of the first place now. */
  phase: number;
  /** Common speed along the loop. */
  speedMps: number;
  /** Time of `phase`. */
  atS: number;
}

/** The pattern at an onboard time, by the clock alone. */
export function startPattern(offsets: readonly number[], lengthM: number, speedMps: number): Pattern {
  return { offsets: Float64Array.from(offsets), lengthM, phase: 0, speedMps, atS: 0 };
}

export function turnsPerS(pattern: Pattern): number {
  return pattern.speedMps / pattern.lengthM;
}

/** Phase of a place now. */
export function placePhase(pattern: Pattern, place: number): number {
  return wrapTurns(pattern.phase + pattern.offsets[place]!);
}

/** The place whose phase is nearest to `phase`; of equals the first. */
export function nearestPattern(pattern: Pattern, phase: number): number {
  let best = 0;
  let bestTurns = Infinity;
  for (let place = 0; place < pattern.offsets.length; place++) {
    const turns = Math.abs(wrapHalf(phase - placePhase(pattern, place)));
    if (turns < bestTurns) {
      best = place;
      bestTurns = turns;
    }
  }
  return best;
}

/** Moves the pattern on to `atS` at the common speed. */
export function movePattern(pattern: Pattern, atS: number): void {
  pattern.phase = wrapTurns(pattern.phase + turnsPerS(pattern) * (atS - pattern.atS));
  pattern.atS = atS;
}

export interface FleetNow {
  readonly atS: number;
  readonly silenceS: number;
}

/** Phase by now of a peer that holds its place, or −1 for any other. */
function holderPhase(pattern: Pattern, peers: Peers, peer: number, now: FleetNow): number {
  if (peer === peers.selfIndex || !isHeard(peers, peer, now)) return -1;
  return peerState(peers, peer) === 'holding' ? peerPhase(peers, peer, now.atS, turnsPerS(pattern)) : -1;
}

/**
 * Draws the pattern by `share` toward the vehicles that hold their places; `ownTurns` is how far ahead of
 * its place this one is, null if it does not hold one.
 */
export function followFleet(
  pattern: Pattern, peers: Peers, now: FleetNow & { share: number; ownTurns: number | null },
): void {
  let sum = 0;
  let counted = 0;
  for (let peer = 0; peer < peers.count; peer++) {
    const phase = holderPhase(pattern, peers, peer, now);
    if (phase < 0) continue;
    sum += wrapHalf(phase - placePhase(pattern, nearestPattern(pattern, phase)));
    counted += 1;
  }
  if (now.ownTurns !== null) {
    sum += wrapHalf(now.ownTurns);
    counted += 1;
  }
  if (counted > 0) pattern.phase = wrapTurns(pattern.phase + (sum / counted) * now.share);
}

/**
 * Lays the pattern on the vehicles that hold their places, at once: of all ways to put a place on a
 * holder the one with the least sum of squared distances, and of equals the one nearest to the present.
 */
export function alignPattern(pattern: Pattern, peers: Peers, now: FleetNow): void {
  const before = pattern.phase;
  let best = before;
  let bestCost = Infinity;
  for (let peer = 0; peer < peers.count; peer++) {
    const phase = holderPhase(pattern, peers, peer, now);
    if (phase < 0) continue;
    for (let place = 0; place < pattern.offsets.length; place++) {
      pattern.phase = wrapTurns(phase - pattern.offsets[place]!);
      const cost = squaredMisfit(pattern, peers, now) + NEAR_WEIGHT * wrapHalf(pattern.phase - before) ** 2;
      if (cost < bestCost) {
        best = pattern.phase;
        bestCost = cost;
      }
    }
  }
  pattern.phase = best;
}

function squaredMisfit(pattern: Pattern, peers: Peers, now: FleetNow): number {
  let sum = 0;
  for (let peer = 0; peer < peers.count; peer++) {
    const phase = holderPhase(pattern, peers, peer, now);
    if (phase >= 0) sum += wrapHalf(phase - placePhase(pattern, nearestPattern(pattern, phase))) ** 2;
  }
  return sum;
}
