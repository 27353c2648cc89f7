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

export interface PatternTick {
  readonly atS: number;
  readonly silenceS: number;
  /** Time in which the pattern follows what the fleet shows. */
  readonly followS: number;
  /** Own phase and place while holding, or null. */
  readonly own: { readonly phase: number; readonly place: number } | null;
}

/** Moves the pattern on to `atS` and draws it toward the vehicles that hold their places. */
export function movePattern(pattern: Pattern, peers: Peers, tick: PatternTick): void {
  const stepS = tick.atS - pattern.atS;
  pattern.phase = wrapTurns(pattern.phase + turnsPerS(pattern) * stepS);
  pattern.atS = tick.atS;
  let sum = 0;
  let counted = 0;
  for (let peer = 0; peer < peers.count; peer++) {
    if (peer === peers.selfIndex || !isHeard(peers, peer, tick) || peerState(peers, peer) !== 'holding') continue;
    const phase = peerPhase(peers, peer, { atS: tick.atS, turnsPerS: turnsPerS(pattern) });
    sum += wrapHalf(phase - placePhase(pattern, nearestPattern(pattern, phase)));
    counted += 1;
  }
  if (tick.own !== null) {
    sum += wrapHalf(tick.own.phase - placePhase(pattern, tick.own.place));
    counted += 1;
  }
  if (counted === 0) return;
  pattern.phase = wrapTurns(pattern.phase + (sum / counted) * Math.min(1, Math.max(0, stepS) / tick.followS));
}
