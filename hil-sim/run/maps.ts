/**
 * The agents' maps against the water: each map says the current at phases 0/64 to 63/64 of the loop.
 * Error: the norm of (map − truth) at each point. Spread: the norm of (map − the mean over the
 * vehicles counted that gave a map in the same tick). One picture a minute is kept for the report.
 */
import type { MapMessage } from '../../messages/steer.ts';
import { addSquare, type Tally } from './tally.ts';
import { placeAt, type Track } from './track.ts';

const POINTS = 64;
const MINUTE_S = 60;
const TOLERANCE_S = 1e-6;
/** Of a picture, each point: the fleet's mean east and north, the truth's, the mean stated sigma. */
const FIELDS = 5;

export type Water = (eastM: number, northM: number, timeS: number, out: Float64Array) => void;

export interface Maps {
  /** East and north of each point. */
  readonly places: Float64Array;
  readonly minutes: number;
  /** By minute × points × fields. */
  readonly pictures: Float32Array;
  /** By minute: rms error and spread over points and vehicles; NaN where there is no map. */
  readonly errorMps: Float64Array;
  readonly spreadMps: Float64Array;
  readonly truth: Float64Array;
  readonly mean: Float64Array;
  readonly scratch: Float64Array;
}

export function startMaps(track: Track, durationS: number): Maps {
  const places = new Float64Array(2 * POINTS);
  const scratch = new Float64Array(2);
  for (let point = 0; point < POINTS; point++) {
    placeAt(track, point / POINTS, scratch);
    places.set(scratch, 2 * point);
  }
  const minutes = Math.floor(durationS / MINUTE_S) + 1;
  return {
    places,
    minutes,
    scratch,
    pictures: new Float32Array(minutes * POINTS * FIELDS).fill(NaN),
    errorMps: new Float64Array(minutes).fill(NaN),
    spreadMps: new Float64Array(minutes).fill(NaN),
    truth: new Float64Array(2 * POINTS),
    mean: new Float64Array(3 * POINTS),
  };
}

/** Takes the maps of one tick (null where a vehicle gave none, or does not count). */
export function takeMaps(
  maps: Maps,
  given: readonly (MapMessage | null)[],
  at: { timeS: number; water: Water; error: Tally | null; spread: Tally | null },
): void {
  const count = meanOf(maps, given);
  if (count === 0) return;
  for (let point = 0; point < POINTS; point++) {
    at.water(maps.places[2 * point]!, maps.places[2 * point + 1]!, at.timeS, maps.scratch);
    maps.truth.set(maps.scratch, 2 * point);
  }
  let errorSum = 0;
  let spreadSum = 0;
  for (let index = 0; index < given.length; index++) {
    const map = given[index]!;
    if (map === null) continue;
    for (let point = 0; point < POINTS; point++) {
      const east = map.east_mps[point]!;
      const north = map.north_mps[point]!;
      const error2 = square(east - maps.truth[2 * point]!, north - maps.truth[2 * point + 1]!);
      const spread2 = square(east - maps.mean[3 * point]!, north - maps.mean[3 * point + 1]!);
      if (at.error !== null) addSquare(at.error, index, error2, at.timeS);
      if (at.spread !== null) addSquare(at.spread, index, spread2, at.timeS);
      errorSum += error2;
      spreadSum += spread2;
    }
  }
  keepPicture(maps, at.timeS, {
    errorMps: Math.sqrt(errorSum / count / POINTS),
    spreadMps: Math.sqrt(spreadSum / count / POINTS),
  });
}

function square(east: number, north: number): number {
  return east * east + north * north;
}

/** Fills `mean` with the mean current and sigma over the maps given; answers how many there are. */
function meanOf(maps: Maps, given: readonly (MapMessage | null)[]): number {
  let count = 0;
  maps.mean.fill(0);
  for (const map of given) {
    if (map === null) continue;
    count += 1;
    for (let point = 0; point < POINTS; point++) {
      maps.mean[3 * point]! += map.east_mps[point]!;
      maps.mean[3 * point + 1]! += map.north_mps[point]!;
      maps.mean[3 * point + 2]! += map.sigma_mps[point]!;
    }
  }
  for (let at = 0; at < maps.mean.length; at++) maps.mean[at]! /= count;
  return count;
}

/** Keeps the first picture of a minute. */
function keepPicture(maps: Maps, timeS: number, rms: { errorMps: number; spreadMps: number }): void {
  const minute = Math.floor((timeS + TOLERANCE_S) / MINUTE_S);
  if (minute >= maps.minutes || maps.errorMps[minute] === maps.errorMps[minute]) return;
  maps.errorMps[minute] = rms.errorMps;
  maps.spreadMps[minute] = rms.spreadMps;
  for (let point = 0; point < POINTS; point++) {
    const at = (minute * POINTS + point) * FIELDS;
    maps.pictures[at] = maps.mean[3 * point]!;
    maps.pictures[at + 1] = maps.mean[3 * point + 1]!;
    maps.pictures[at + 2] = maps.truth[2 * point]!;
    maps.pictures[at + 3] = maps.truth[2 * point + 1]!;
    maps.pictures[at + 4] = maps.mean[3 * point + 2]!;
  }
}

/** One point of a kept picture. */
export interface MapPoint {
  readonly eastM: number;
  readonly northM: number;
  readonly meanEastMps: number;
  readonly meanNorthMps: number;
  readonly trueEastMps: number;
  readonly trueNorthMps: number;
  readonly sigmaMps: number;
}

/** The picture of a minute, every `step`-th point; null if no map came in it. */
export function pictureOf(maps: Maps, minute: number, step = 1): MapPoint[] | null {
  if (minute < 0 || minute >= maps.minutes || Number.isNaN(maps.errorMps[minute]!)) return null;
  const picture: MapPoint[] = [];
  for (let point = 0; point < POINTS; point += step) {
    const at = (minute * POINTS + point) * FIELDS;
    picture.push({
      eastM: maps.places[2 * point]!,
      northM: maps.places[2 * point + 1]!,
      meanEastMps: maps.pictures[at]!,
      meanNorthMps: maps.pictures[at + 1]!,
      trueEastMps: maps.pictures[at + 2]!,
      trueNorthMps: maps.pictures[at + 3]!,
      sigmaMps: maps.pictures[at + 4]!,
    });
  }
  return picture;
}
