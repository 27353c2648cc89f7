/**
 * The loop as the bench measures against it: a closed chain of 4096 short chords, each vertex on the
 * true line, with its arc length. Slow-and-plain geometry on purpose, shared with no agent: whatever a
 * closed form gets wrong about an angle, this does not repeat.
 *
 * The nearest point is exact on the chain: blocks of chords are left out only when their bounding circle
 * is farther than the best found. The chain lies inside a circle by at most R(1 − cos(π/4096)), which
 * is 0.2 mm at 600 m; the phase of a place d off it is right to d/(R + d) of half a chord. Phase 0 is
 * due north of a circle's centre; phase grows along the travel.
 */
import { assert } from '../../messages/assert.ts';
import type { Trial } from '../trial/schema.ts';

const CHORDS = 4096;
const CHORDS_A_BLOCK = 256;
const CHORDS_A_PIECE = 16;

type Loop = Trial['mission']['loop'];

export interface Track {
  readonly lengthM: number;
  /** Vertices in the order of travel; the last repeats the first. */
  readonly eastM: Float64Array;
  readonly northM: Float64Array;
  /** Arc length from phase 0 to each vertex. */
  readonly alongM: Float64Array;
  /** Bounding circles of blocks of chords, and of the pieces of blocks: east, north, radius. */
  readonly blocks: Float64Array;
  readonly pieces: Float64Array;
}

/** The point of `loop` at a share of its parameter, 0 to 1; written to `out`. */
function pointOf(loop: Loop, share: number, out: Float64Array): void {
  switch (loop.shape) {
    case 'circle': {
      const bearingRad = 2 * Math.PI * (loop.turn === 'clockwise' ? share : -share);
      out[0] = loop.centre.east + loop.radius * Math.sin(bearingRad);
      out[1] = loop.centre.north + loop.radius * Math.cos(bearingRad);
      return;
    }
    default:
      loop.shape satisfies never;
  }
}

/** The chain of a mission's loop. */
export function trackOf(loop: Loop): Track {
  const eastM = new Float64Array(CHORDS + 1);
  const northM = new Float64Array(CHORDS + 1);
  const alongM = new Float64Array(CHORDS + 1);
  const point = new Float64Array(2);
  for (let index = 0; index <= CHORDS; index++) {
    pointOf(loop, (index % CHORDS) / CHORDS, point);
    eastM[index] = point[0]!;
    northM[index] = point[1]!;
    if (index === 0) continue;
    const east = point[0]! - eastM[index - 1]!;
    const north = point[1]! - northM[index - 1]!;
    alongM[index] = alongM[index - 1]! + Math.sqrt(east * east + north * north);
  }
  assert(alongM[CHORDS]! > 0, 'a loop has a length');
  return {
    lengthM: alongM[CHORDS]!,
    eastM,
    northM,
    alongM,
    blocks: bounds(eastM, northM, CHORDS_A_BLOCK),
    pieces: bounds(eastM, northM, CHORDS_A_PIECE),
  };
}

/** A bounding circle for every run of `size` chords, about its middle vertex. */
function bounds(eastM: Float64Array, northM: Float64Array, size: number): Float64Array {
  const circles = new Float64Array((3 * CHORDS) / size);
  for (let run = 0; run < CHORDS / size; run++) {
    const first = run * size;
    const middle = first + size / 2;
    let radiusM = 0;
    for (let index = first; index <= first + size; index++) {
      const east = eastM[index]! - eastM[middle]!;
      const north = northM[index]! - northM[middle]!;
      radiusM = Math.max(radiusM, Math.sqrt(east * east + north * north));
    }
    circles.set([eastM[middle]!, northM[middle]!, radiusM], 3 * run);
  }
  return circles;
}

/** Where a search ended: `place` holds distance to the loop in m, and phase; `chord` starts the next. */
export interface Nearest {
  readonly place: Float64Array;
  readonly chord: Int32Array;
  /** Squared distance, arc length, chord and distance of the best so far; a search fills it anew. */
  readonly best: Float64Array;
}

export function startNearest(): Nearest {
  return { place: new Float64Array(2), chord: new Int32Array(1), best: new Float64Array(4) };
}

/** The nearest point of the loop, by distance and phase in [0, 1); a near guess only makes it quicker. */
export function findNearest(track: Track, eastM: number, northM: number, nearest: Nearest): void {
  const { best } = nearest;
  best[0] = Infinity;
  tryChord(track, eastM, northM, nearest.chord[0]!, best);
  const blocks = CHORDS / CHORDS_A_BLOCK;
  const pieces = CHORDS_A_BLOCK / CHORDS_A_PIECE;
  for (let block = 0; block < blocks; block++) {
    if (isBeyond(track.blocks, block, eastM, northM, best)) continue;
    for (let piece = block * pieces; piece < (block + 1) * pieces; piece++) {
      if (isBeyond(track.pieces, piece, eastM, northM, best)) continue;
      const end = (piece + 1) * CHORDS_A_PIECE;
      for (let chord = piece * CHORDS_A_PIECE; chord < end; chord++)
        tryChord(track, eastM, northM, chord, best);
    }
  }
  const phase = best[1]! / track.lengthM;
  nearest.place[0] = Math.sqrt(best[0]!);
  nearest.place[1] = phase >= 1 ? phase - 1 : phase;
  nearest.chord[0] = best[2]!;
}

/** Whether a bounding circle lies wholly farther away than the best so far. */
function isBeyond(
  circles: Float64Array,
  run: number,
  eastM: number,
  northM: number,
  best: Float64Array,
): boolean {
  const east = eastM - circles[3 * run]!;
  const north = northM - circles[3 * run + 1]!;
  const withinM = best[3]! + circles[3 * run + 2]!;
  return east * east + north * north > withinM * withinM;
}

function tryChord(track: Track, eastM: number, northM: number, chord: number, best: Float64Array): void {
  const fromEast = track.eastM[chord]!;
  const fromNorth = track.northM[chord]!;
  const wayEast = track.eastM[chord + 1]! - fromEast;
  const wayNorth = track.northM[chord + 1]! - fromNorth;
  const east = eastM - fromEast;
  const north = northM - fromNorth;
  const way2 = wayEast * wayEast + wayNorth * wayNorth;
  let share = (east * wayEast + north * wayNorth) / way2;
  share = share < 0 ? 0 : share > 1 ? 1 : share;
  const offEast = east - share * wayEast;
  const offNorth = north - share * wayNorth;
  const off2 = offEast * offEast + offNorth * offNorth;
  if (off2 >= best[0]!) return;
  best[0] = off2;
  best[3] = Math.sqrt(off2);
  best[1] = track.alongM[chord]! + share * (track.alongM[chord + 1]! - track.alongM[chord]!);
  best[2] = chord;
}

/** The place at a phase in [0, 1), written to `out` as east, north. */
export function placeAt(track: Track, phase: number, out: Float64Array): void {
  assert(phase >= 0 && phase < 1, 'a phase is in [0, 1)');
  const alongM = phase * track.lengthM;
  let low = 0;
  let high = CHORDS;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (track.alongM[middle]! <= alongM) low = middle;
    else high = middle;
  }
  const share = (alongM - track.alongM[low]!) / (track.alongM[high]! - track.alongM[low]!);
  out[0] = track.eastM[low]! + share * (track.eastM[high]! - track.eastM[low]!);
  out[1] = track.northM[low]! + share * (track.northM[high]! - track.northM[low]!);
}
