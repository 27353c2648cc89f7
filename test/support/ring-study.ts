/**
 * How well a fleet's estimators know the water and themselves: the real estimator of every vehicle on
 * the ring of `ring-water.ts`, every note passed on (late, or lost, if asked), judged against truth.
 */
import type { Note } from '../../messages/frame.ts';
import { defaultSettings } from '../../messages/settings.ts';
import {
  biasNow, currentAt, reckonTick, startEstimator, takeNote, workEstimator, type Estimator,
} from '../../onboard/core/estimator.ts';
import { randomFrom } from './estimating.ts';
import { missionFor } from './mission.ts';
import { DEMO_SENSORS, RING, drawnWater, ringVehicle, type RingSensors, type RingVehicle, type Upset, type Water } from './ring-water.ts';

export { DEMO_SENSORS, drawnWater };

export interface StudyOptions {
  readonly seed: number;
  readonly hours?: number;
  readonly fleetSize?: number;
  /** Judged from here on; one lap by default. */
  readonly fromS?: number;
  readonly sensors?: RingSensors;
  readonly settings?: Record<string, number>;
  readonly water?: Water;
  readonly upsets?: readonly Upset[];
  readonly alone?: boolean;
  /** A note reaches each peer after up to this long, in any order; 0 at once. */
  readonly lateS?: number;
  /** Called each minute after the judging of it. */
  readonly watch?: (atS: number, estimators: readonly Estimator[], errors: { mapMps: number; positionM: number }) => void;
}

/** Mean squares over what was judged; NEES per degree of freedom. */
export interface StudyResult {
  readonly mapRmsMps: number;
  readonly mapNees: number;
  readonly hereRmsMps: number;
  readonly positionRmsM: number;
  readonly positionNees: number;
  readonly positionMaxM: number;
  readonly biasRmsDeg: number;
  readonly biasNees: number;
  readonly scaleRms: number;
  readonly scaleNees: number;
  readonly notes: number;
}

class Mean {
  sum = 0;
  count = 0;
  max = 0;
  add(value: number): void {
    this.sum += value;
    this.count += 1;
    this.max = Math.max(this.max, value);
  }
  get mean(): number {
    return this.sum / this.count;
  }
}

/** e' C⁻¹ e per degree of freedom, two dimensions. */
function nees2(east: number, north: number, cov: readonly [number, number, number]): number {
  const [a, b, c] = cov;
  return (c * east * east - 2 * b * east * north + a * north * north) / (a * c - b * b) / 2;
}

interface Post { readonly atS: number; readonly to: number; readonly note: Note }

export function runStudy(options: StudyOptions): StudyResult {
  const { seed, hours = 6, fleetSize = 5, fromS = RING.lapS, sensors = DEMO_SENSORS, alone = false, lateS = 0 } = options;
  const water = options.water ?? drawnWater(seed);
  const vehicles = Array.from({ length: fleetSize }, (_, index) => ringVehicle({ seed, index, fleetSize, water }, sensors, options.upsets?.[index]));
  const estimators = vehicles.map((vehicle, index) => startEstimator(missionOf(vehicle, { index, fleetSize, sensors, settings: options.settings ?? {} })));
  const random = randomFrom(555 + seed);
  const tallies = newTallies();
  let post: Post[] = [];
  for (let atS = 0; atS <= hours * 3600; atS++) {
    for (const { to, note } of post.filter((letter) => letter.atS <= atS)) takeNote(estimators[to]!, note);
    if (post.length > 0) post = post.filter((letter) => letter.atS > atS);
    const truths = vehicles.map(({ sense }) => sense(atS));
    estimators.forEach((estimator, index) => {
      const truth = truths[index]!;
      const note = reckonTick(estimator, { atS, ...truth, given: null, unrounded: false });
      if (note !== null && !alone) for (let to = 0; to < fleetSize; to++) if (to !== index) post.push({ atS: atS + 1 + lateS * random(), to, note });
      workEstimator(estimator);
    });
    if (atS % 60 !== 0) continue;
    const truth = { estimators, vehicles, truths, water };
    if (atS >= fromS) judge(atS, truth, tallies);
    if (options.watch === undefined) continue;
    const now = newTallies();
    judge(atS, truth, now);
    options.watch(atS, estimators, { mapMps: Math.sqrt(now.map.mean), positionM: Math.sqrt(now.position.mean) });
  }
  const root = (mean: Mean): number => Math.sqrt(mean.mean);
  return {
    mapRmsMps: root(tallies.map), mapNees: tallies.mapNees.mean, hereRmsMps: root(tallies.here),
    positionRmsM: root(tallies.position), positionNees: tallies.positionNees.mean, positionMaxM: Math.sqrt(tallies.position.max),
    biasRmsDeg: (root(tallies.bias) * 180) / Math.PI, biasNees: tallies.biasNees.mean,
    scaleRms: root(tallies.scale), scaleNees: tallies.scaleNees.mean, notes: estimators[0]!.log.counts.total,
  };
}

function missionOf(vehicle: RingVehicle, of: { index: number; fleetSize: number; sensors: RingSensors; settings: Record<string, number> }) {
  const { index, fleetSize, sensors, settings } = of;
  const base = missionFor(index, fleetSize);
  const start = vehicle.sense(-1);
  return missionFor(index, fleetSize, {
    self: {
      ...base.self,
      start: { east_m: start.eastM, north_m: start.northM, depth_m: 0, heading_deg: 0 },
      fixEvery_s: sensors.fixEveryS, fixSigma_m: sensors.fixSigmaM,
      compassBiasSigma_deg: (sensors.compassBiasRad * 180) / Math.PI, compassSigma_deg: (sensors.compassSigmaRad * 180) / Math.PI,
      logScaleSigma: sensors.logScale, logSigma_mps: sensors.logSigmaMps,
    },
    onboard: { ...defaultSettings(), ...settings },
  });
}

function newTallies(): Tallies {
  const of = (): Mean => new Mean();
  return { map: of(), mapNees: of(), here: of(), position: of(), positionNees: of(), bias: of(), biasNees: of(), scale: of(), scaleNees: of() };
}

type Tallies = Record<'map' | 'mapNees' | 'here' | 'position' | 'positionNees' | 'bias' | 'biasNees' | 'scale' | 'scaleNees', Mean>;

function judge(
  atS: number,
  of: { estimators: readonly Estimator[]; vehicles: readonly RingVehicle[]; truths: readonly { eastM: number; northM: number }[]; water: Water },
  tallies: Tallies,
): void {
  const current = new Float64Array(2);
  const answer = { eastMps: 0, northMps: 0, varEastM2ps2: 0, covEastNorthM2ps2: 0, varNorthM2ps2: 0 };
  const bias = { compassBiasRad: 0, compassBiasSigmaRad: 0, logScale: 0, logScaleSigma: 0 };
  of.estimators.forEach((estimator, index) => {
    const truth = of.truths[index]!;
    const { position } = estimator;
    const east = position.eastM - truth.eastM;
    const north = position.northM - truth.northM;
    tallies.position.add(east * east + north * north);
    tallies.positionNees.add(nees2(east, north, [position.varEastM2, position.covEastNorthM2, position.varNorthM2]));
    biasNow(estimator, bias);
    const biasError = bias.compassBiasRad - of.vehicles[index]!.biasRad;
    const scaleError = bias.logScale - of.vehicles[index]!.scale;
    tallies.bias.add(biasError ** 2);
    tallies.biasNees.add((biasError / bias.compassBiasSigmaRad) ** 2);
    tallies.scale.add(scaleError ** 2);
    tallies.scaleNees.add((scaleError / bias.logScaleSigma) ** 2);
    currentAt(estimator, { eastM: position.eastM, northM: position.northM, atS }, answer);
    of.water(truth.eastM, truth.northM, atS, current);
    tallies.here.add((answer.eastMps - current[0]!) ** 2 + (answer.northMps - current[1]!) ** 2);
    for (let point = 0; point < 64; point += 4) {
      const angle = (2 * Math.PI * (point + (atS / 60) % 4)) / 64;
      const at = { eastM: RING.radiusM * Math.sin(angle), northM: RING.radiusM * Math.cos(angle), atS };
      currentAt(estimator, at, answer);
      of.water(at.eastM, at.northM, atS, current);
      const offEast = answer.eastMps - current[0]!;
      const offNorth = answer.northMps - current[1]!;
      tallies.map.add(offEast ** 2 + offNorth ** 2);
      tallies.mapNees.add(nees2(offEast, offNorth, [answer.varEastM2ps2, answer.covEastNorthM2ps2, answer.varNorthM2ps2]));
    }
  });
}
