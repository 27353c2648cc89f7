/**
 * Where a vehicle likely is that woke up in the middle of a run and remembers nothing: if every other
 * vehicle is heard and holds a place, exactly one place of the pattern is open, and it was its own.
 */
import type { Guidance } from './guidance-memory.ts';
import { pointAt } from './loop.ts';
import { nearestPattern, placePhase, turnsPerS } from './pattern.ts';
import { isHeard, peerPhase, peerState } from './peers.ts';

/** What was heard longer ago says too little of now. */
const FRESH_S = 90;

/** Writes the point of the one open place by now to `out`; false if there is not exactly one. */
export function guessPlace(guidance: Guidance, atS: number, out: Float64Array): boolean {
  const { peers, pattern, loop, selfIndex } = guidance;
  const places = pattern.offsets.length;
  let open = (places * (places - 1)) / 2;
  let claimed = 0;
  for (let peer = 0; peer < peers.count; peer++) {
    if (peer === selfIndex) continue;
    if (!isHeard(peers, peer, { atS, silenceS: FRESH_S }) || peerState(peers, peer) !== 'holding') return false;
    const place = nearestPattern(pattern, peerPhase(peers, peer, atS, turnsPerS(pattern)));
    if ((claimed & (1 << place)) !== 0) return false;
    claimed |= 1 << place;
    open -= place;
  }
  pointAt(loop, placePhase(pattern, open), out);
  return true;
}
