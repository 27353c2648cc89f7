/**
 * A second sea for the estimator alone, written apart from the bench's: water drawn at random, and a
 * fleet that goes round a 600 m ring without error, with compass, log and fixes in their demo quality.
 *
 * Water: uniform + M2 tide + moving Lamb-Oseen eddy (peak at 1.1209 core radii, METHODS A20) + shear.
 */
import { normalsFrom, randomFrom } from './estimating.ts';

const TURN = 2 * Math.PI;
const M2_S = 12.4206 * 3600;

/** Writes the current at a place and time as east, north. */
export type Water = (eastM: number, northM: number, atS: number, out: Float64Array) => void;

/** A current that is given by its set, clockwise from north. */
const toward = (bearing: number, speed: number): readonly [number, number] => [speed * Math.sin(bearing), speed * Math.cos(bearing)];

/** Water of the demo's family: its strengths as there, its directions, places and turns drawn. */
export function drawnWater(seed: number): Water {
  const random = randomFrom(9000 + seed);
  for (let spent = 0; spent < 8; spent++) random();
  const uniform = toward(TURN * random(), 0.05 + 0.1 * random());
  const tideBearing = TURN * random();
  const tidePhase = TURN * random();
  const major = 0.15 + 0.15 * random();
  const minor = 0.1 * (random() - 0.5);
  const eddyAt = [800 * (random() - 0.5), 800 * (random() - 0.5)] as const;
  const eddyMoves = toward(TURN * random(), 0.02);
  const peakAtM = 400 + 200 * random();
  const peak = (random() < 0.5 ? -1 : 1) * (0.15 + 0.15 * random());
  const shearBearing = TURN * random();
  const perM = 1e-4 * random();
  const coreM = peakAtM / 1.1209;
  const strength = (peak * peakAtM) / (1 - Math.exp(-(1.1209 ** 2)));
  return (eastM, northM, atS, out) => {
    const angle = (TURN * atS) / M2_S - tidePhase;
    const along = major * Math.cos(angle);
    const left = minor * Math.sin(angle);
    const offEast = eastM - eddyAt[0] - eddyMoves[0] * atS;
    const offNorth = northM - eddyAt[1] - eddyMoves[1] * atS;
    const off2 = offEast * offEast + offNorth * offNorth + 1e-6;
    const spin = (strength * (1 - Math.exp(-off2 / (coreM * coreM)))) / off2;
    const right = eastM * Math.cos(shearBearing) - northM * Math.sin(shearBearing);
    const sheared = perM * right;
    out[0] = uniform[0] + along * Math.sin(tideBearing) - left * Math.cos(tideBearing) - spin * offNorth + sheared * Math.sin(shearBearing);
    out[1] = uniform[1] + along * Math.cos(tideBearing) + left * Math.sin(tideBearing) + spin * offEast + sheared * Math.cos(shearBearing);
  };
}

/** How good the sensors are, and what goes wrong with them. */
export interface RingSensors {
  readonly fixSigmaM: number;
  readonly fixEveryS: number;
  readonly fixLatencyS: number;
  readonly compassBiasRad: number;
  readonly compassSigmaRad: number;
  readonly logScale: number;
  readonly logSigmaMps: number;
}

export const DEMO_SENSORS: RingSensors = {
  fixSigmaM: 5, fixEveryS: 300, fixLatencyS: 0,
  compassBiasRad: Math.PI / 180, compassSigmaRad: Math.PI / 360, logScale: 0.01, logSigmaMps: 0.02,
};

/** What one vehicle perceives in one tick, and the truth behind it. */
export interface RingSense {
  eastM: number;
  northM: number;
  headingRad: number;
  speedMps: number;
  fix: { atS: number; eastM: number; northM: number; sigmaM: number } | null;
}

export interface RingVehicle {
  readonly biasRad: number;
  readonly scale: number;
  /** The sense of the tick at `atS`; ticks come one by one, from 0. */
  readonly sense: (atS: number) => RingSense;
}

export const RING = { radiusM: 600, groundMps: 1.05, lapS: (TURN * 600) / 1.05 } as const;

/** Adds to what the sensors say, for faults: to the heading, the speed's scale, the fix; null drops the fix. */
export interface Upset {
  readonly headingRad?: (atS: number) => number;
  readonly speedShare?: (atS: number) => number;
  readonly fix?: (atS: number, random: () => number) => readonly [number, number] | null;
}

/** One vehicle of `fleetSize`, evenly spaced, going round clockwise at the ring's ground speed. */
export function ringVehicle(
  of: { seed: number; index: number; fleetSize: number; water: Water }, sensors: RingSensors = DEMO_SENSORS, upset: Upset = {},
): RingVehicle {
  const normal = normalsFrom(100 * of.seed + of.index + 1);
  const random = randomFrom(77_000 + 100 * of.seed + of.index);
  for (let spent = 0; spent < 10; spent++) normal();
  const biasRad = sensors.compassBiasRad * normal();
  const scale = sensors.logScale * normal();
  const current = new Float64Array(2);
  const { radiusM, groundMps } = RING;
  const due: { atS: number; eastM: number; northM: number; sigmaM: number }[] = [];
  const sense = (atS: number): RingSense => {
    const place = TURN * (of.index / of.fleetSize) + (groundMps * atS) / radiusM;
    const eastM = radiusM * Math.sin(place);
    const northM = radiusM * Math.cos(place);
    of.water(eastM, northM, atS, current);
    const waterEast = groundMps * Math.cos(place) - current[0]!;
    const waterNorth = -groundMps * Math.sin(place) - current[1]!;
    const heading = Math.atan2(waterEast, waterNorth);
    const speed = Math.sqrt(waterEast * waterEast + waterNorth * waterNorth);
    const offS = Math.round((sensors.fixEveryS * of.index) / of.fleetSize);
    if ((atS - offS) % sensors.fixEveryS === 0) {
      const made = { atS, eastM: eastM + sensors.fixSigmaM * normal(), northM: northM + sensors.fixSigmaM * normal(), sigmaM: sensors.fixSigmaM };
      const moved = upset.fix === undefined ? [0, 0] as const : upset.fix(atS, random);
      if (moved !== null) due.push({ ...made, eastM: made.eastM + moved[0], northM: made.northM + moved[1] });
    }
    const arrived = due.length > 0 && due[0]!.atS + sensors.fixLatencyS <= atS ? due.shift()! : null;
    return {
      eastM,
      northM,
      headingRad: heading + biasRad + (upset.headingRad?.(atS) ?? 0) + sensors.compassSigmaRad * normal(),
      speedMps: speed * (1 + scale + (upset.speedShare?.(atS) ?? 0)) + sensors.logSigmaMps * normal(),
      fix: arrived,
    };
  };
  return { biasRad, scale, sense };
}
