/**
 * The last stretch of the own way: every tick of the last two minutes, for fixes that come late, and a
 * place every few seconds of the last three quarters of an hour, for the shape of a note's path.
 */
import type { Way } from './reckon.ts';

const WAYS = 128;
const PLACES = 512;
const PLACE_EVERY_S = 5;
const FIELDS = 8;

export interface Track {
  /** Ring of ways: midS, seconds, waterEastM, waterNorthM, eastM, northM, carriedEastM,
   * carriedNorthM. */
  readonly ways: Float64Array;
  /** Ring of places: timeS, eastM, northM. */
  readonly places: Float64Array;
  readonly counts: { ways: number; places: number };
}

export function startTrack(): Track {
  return {
    ways: new Float64Array(WAYS * FIELDS),
    places: new Float64Array(PLACES * 3),
    counts: { ways: 0, places: 0 },
  };
}

export function addTrack(track: Track, way: Way): void {
  const { ways, places, counts } = track;
  const at = (counts.ways % WAYS) * FIELDS;
  ways[at] = way.midS;
  ways[at + 1] = way.seconds;
  ways[at + 2] = way.waterEastM;
  ways[at + 3] = way.waterNorthM;
  ways[at + 4] = way.eastM;
  ways[at + 5] = way.northM;
  ways[at + 6] = way.carriedEastM;
  ways[at + 7] = way.carriedNorthM;
  counts.ways += 1;
  const lastS = counts.places === 0 ? -Infinity : places[((counts.places - 1) % PLACES) * 3]!;
  if (way.midS - lastS < PLACE_EVERY_S) return;
  const place = (counts.places % PLACES) * 3;
  places[place] = way.midS;
  places[place + 1] = way.eastM;
  places[place + 2] = way.northM;
  counts.places += 1;
}

/** Ways kept, 128 at most. */
export function trackCount(track: Track): number {
  return Math.min(WAYS, track.counts.ways);
}

/** The way `back` ticks ago; 1 is the last. */
export function wayBack(track: Track, back: number): Way {
  const at = ((track.counts.ways - back) % WAYS) * FIELDS;
  const { ways } = track;
  return {
    midS: ways[at]!,
    seconds: ways[at + 1]!,
    waterEastM: ways[at + 2]!,
    waterNorthM: ways[at + 3]!,
    eastM: ways[at + 4]!,
    northM: ways[at + 5]!,
    carriedEastM: ways[at + 6]!,
    carriedNorthM: ways[at + 7]!,
  };
}

/** Sums of ways. */
export interface Tail {
  seconds: number;
  waterEastM: number;
  waterNorthM: number;
  carriedEastM: number;
  carriedNorthM: number;
}

/** The sum of the ways after `sinceS`. */
export function tailWay(track: Track, sinceS: number): Tail {
  const sum = { seconds: 0, waterEastM: 0, waterNorthM: 0, carriedEastM: 0, carriedNorthM: 0 };
  const count = trackCount(track);
  for (let back = 1; back <= count; back++) {
    const at = ((track.counts.ways - back) % WAYS) * FIELDS;
    if (!(track.ways[at]! > sinceS)) break;
    sum.seconds += track.ways[at + 1]!;
    sum.waterEastM += track.ways[at + 2]!;
    sum.waterNorthM += track.ways[at + 3]!;
    sum.carriedEastM += track.ways[at + 6]!;
    sum.carriedNorthM += track.ways[at + 7]!;
  }
  return sum;
}

/** The kept place nearest in time to `timeS`, or null if none is within a minute of it. */
export function midTrack(track: Track, timeS: number): { eastM: number; northM: number } | null {
  const { places, counts } = track;
  const count = Math.min(PLACES, counts.places);
  let best = -1;
  let bestS = 60;
  for (let back = 1; back <= count; back++) {
    const at = ((counts.places - back) % PLACES) * 3;
    const offS = Math.abs(places[at]! - timeS);
    if (offS < bestS) {
      bestS = offS;
      best = at;
    }
  }
  return best < 0 ? null : { eastM: places[best + 1]!, northM: places[best + 2]! };
}
