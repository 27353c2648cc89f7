/**
 * The local tangent plane about a trial's datum, on WGS-84: east, north and up in metres, by way of
 * earth-centred coordinates. Constants and check values: METHODS A15.
 */
import { degFromRad, radFromDeg } from '../messages/angles.ts';

const SEMI_MAJOR_M = 6_378_137;
const FLATTENING = 1 / 298.257223563;
const E2 = FLATTENING * (2 - FLATTENING);
/** Each turn of the latitude iteration gains more than two digits; eight are past the last bit. */
const LATITUDE_TURNS = 8;

export interface Geodetic {
  readonly latDeg: number;
  readonly lonDeg: number;
  /** Height above the ellipsoid. */
  readonly heightM: number;
}

export interface LocalPlace {
  readonly eastM: number;
  readonly northM: number;
  readonly upM: number;
}

type Earth = readonly [xM: number, yM: number, zM: number];

/** Earth-centred, earth-fixed coordinates; any latitude in [−90, 90]. */
export function earthFromGeodetic(place: Geodetic): Earth {
  const sinLat = Math.sin(radFromDeg(place.latDeg));
  const cosLat = Math.cos(radFromDeg(place.latDeg));
  const lonRad = radFromDeg(place.lonDeg);
  const primeM = SEMI_MAJOR_M / Math.sqrt(1 - E2 * sinLat * sinLat);
  const axisM = (primeM + place.heightM) * cosLat;
  return [axisM * Math.cos(lonRad), axisM * Math.sin(lonRad), (primeM * (1 - E2) + place.heightM) * sinLat];
}

/** Latitude, longitude and height of earth-centred coordinates near the surface, away from the poles. */
export function geodeticFromEarth([xM, yM, zM]: Earth): Geodetic {
  const axisM = Math.sqrt(xM * xM + yM * yM);
  let latRad = Math.atan2(zM, axisM * (1 - E2));
  let primeM = SEMI_MAJOR_M;
  for (let turn = 0; turn < LATITUDE_TURNS; turn++) {
    const sinLat = Math.sin(latRad);
    primeM = SEMI_MAJOR_M / Math.sqrt(1 - E2 * sinLat * sinLat);
    latRad = Math.atan2(zM + E2 * primeM * sinLat, axisM);
  }
  return {
    latDeg: degFromRad(latRad),
    lonDeg: degFromRad(Math.atan2(yM, xM)),
    heightM: axisM / Math.cos(latRad) - primeM,
  };
}

/** `place` in the tangent plane at `datum`. */
export function localFromGeodetic(datum: Geodetic, place: Geodetic): LocalPlace {
  const origin = earthFromGeodetic(datum);
  const there = earthFromGeodetic(place);
  const [dx, dy, dz] = [there[0] - origin[0], there[1] - origin[1], there[2] - origin[2]];
  const { sinLat, cosLat, sinLon, cosLon } = axes(datum);
  return {
    eastM: -sinLon * dx + cosLon * dy,
    northM: -sinLat * (cosLon * dx + sinLon * dy) + cosLat * dz,
    upM: cosLat * (cosLon * dx + sinLon * dy) + sinLat * dz,
  };
}

/** Latitude, longitude and height of a place in the tangent plane at `datum`. */
export function geodeticFromLocal(datum: Geodetic, place: LocalPlace): Geodetic {
  const origin = earthFromGeodetic(datum);
  const { sinLat, cosLat, sinLon, cosLon } = axes(datum);
  const inward = cosLat * place.upM - sinLat * place.northM;
  return geodeticFromEarth([
    origin[0] - sinLon * place.eastM + cosLon * inward,
    origin[1] + cosLon * place.eastM + sinLon * inward,
    origin[2] + cosLat * place.northM + sinLat * place.upM,
  ]);
}

function axes(datum: Geodetic): { sinLat: number; cosLat: number; sinLon: number; cosLon: number } {
  const latRad = radFromDeg(datum.latDeg);
  const lonRad = radFromDeg(datum.lonDeg);
  return { sinLat: Math.sin(latRad), cosLat: Math.cos(latRad), sinLon: Math.sin(lonRad), cosLon: Math.cos(lonRad) };
}
