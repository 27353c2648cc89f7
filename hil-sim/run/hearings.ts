/**
 * Counts of frames from what became of them at each hearer. A frame counts once a hearer: a repeat of
 * it is left out, whatever became of it. A frame with no hearer (a fleet of one) is not seen here.
 */
import { assert } from '../../messages/assert.ts';
import type { Hearing } from '../sea/sea.ts';

/** Frames of a pair in which a repeat looks for its first copy: repeats come within seconds. */
const RECENT = 8;
const TOLERANCE_S = 1e-6;

export interface HearingCounts {
  readonly fleetSize: number;
  readonly tickS: number;
  /** By sender and tick: whether it said a frame then; a vehicle says at most one a tick. */
  readonly said: Uint8Array;
  readonly framesSent: Float64Array;
  /** By hearer. */
  readonly offered: Float64Array;
  readonly heard: Float64Array;
  /** By pair: when its last few frames were said, and where the next goes. */
  readonly recentS: Float64Array;
  readonly recentNext: Uint8Array;
}

export function startHearings(fleetSize: number, ticks: number, tickS: number): HearingCounts {
  const pairs = fleetSize * fleetSize;
  return {
    fleetSize,
    tickS,
    said: new Uint8Array(fleetSize * ticks),
    framesSent: new Float64Array(fleetSize),
    offered: new Float64Array(fleetSize),
    heard: new Float64Array(fleetSize),
    recentS: new Float64Array(pairs * RECENT).fill(-1),
    recentNext: new Uint8Array(pairs),
  };
}

/** Takes one hearing; answers whether it is the first of its frame at this hearer. */
export function takeHearing(counts: HearingCounts, hearing: Hearing): boolean {
  const { fromIndex, toIndex, sentS } = hearing;
  const pair = fromIndex * counts.fleetSize + toIndex;
  for (let place = 0; place < RECENT; place++) {
    if (counts.recentS[pair * RECENT + place] === sentS) return false;
  }
  counts.recentS[pair * RECENT + counts.recentNext[pair]!] = sentS;
  counts.recentNext[pair] = (counts.recentNext[pair]! + 1) % RECENT;
  counts.offered[toIndex]! += 1;
  if (hearing.fate === 'heard') counts.heard[toIndex]! += 1;
  const ticks = counts.said.length / counts.fleetSize;
  const tick = Math.floor((sentS + TOLERANCE_S) / counts.tickS);
  assert(tick >= 0 && tick < ticks, 'a frame is said within the run');
  if (counts.said[fromIndex * ticks + tick] === 0) {
    counts.said[fromIndex * ticks + tick] = 1;
    counts.framesSent[fromIndex]! += 1;
  }
  return true;
}
