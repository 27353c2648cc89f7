/**
 * A small sea for guidance alone: bodies with turn rate, lag and climb, water in motion, frames that
 * come late or not at all, and a picture that is right or smoothly a little wrong. Its mathematics are
 * its own. Results are the measures of a run, reckoned from true positions.
 */
import { AGENT_STATES, type Frame } from '../../messages/frame.ts';
import type { Mission } from '../../messages/mission.ts';
import type { Order } from '../../messages/sense.ts';
import {
  guide, hearPeer, isBatteryLow, startGuidance, type Guidance, type GuidanceInput, type GuidanceOutput,
} from '../../onboard/core/guidance.ts';
import { missionFor } from './mission.ts';

export type Water = (eastM: number, northM: number, timeS: number, out: Float64Array) => void;

export interface Scene {
  readonly count: number;
  readonly durationS: number;
  readonly water: Water;
  readonly change?: Partial<Mission>;
  readonly seed?: number;
  /** Long-run share of frames lost per pair, and mean run of lost frames. */
  readonly loss?: number;
  readonly burst?: number;
  readonly delayS?: number;
  /** Size of the smooth error in what the agents know: current per component, position per axis. */
  readonly currentErrorMps?: number;
  readonly positionErrorM?: number;
  readonly starts?: (index: number) => { readonly eastM: number; readonly northM: number };
  /** Tick at which a vehicle begins to exist; or is started anew without memory, lost until its next fix. */
  readonly beginsAtS?: (index: number) => number;
  readonly restarts?: readonly { readonly index: number; readonly atS: number }[];
  readonly ordersAt?: (index: number, timeS: number) => readonly Order[];
  /** Vehicles that go silent from a time on. */
  readonly silentFromS?: (index: number) => number;
  /** Start of the measures; from forming up where absent. */
  readonly measureFromS?: number;
  readonly onTick?: (timeS: number, vessels: readonly Vessel[]) => void;
}

export interface Vessel {
  readonly index: number;
  readonly biasRad: number;
  readonly logScale: number;
  guidance: Guidance;
  readonly input: GuidanceInput;
  readonly out: GuidanceOutput;
  eastM: number;
  northM: number;
  depthM: number;
  headingRad: number;
  speedMps: number;
  battery: number;
  begun: boolean;
  lostUntilS: number;
  sequence: number;
}

export interface Result {
  readonly formUpS: number | null;
  readonly crossTrackRmsM: number;
  readonly crossTrackMaxM: number;
  readonly gapRms: number;
  readonly separationMinM: number;
  readonly farthestM: number;
  readonly vessels: readonly Vessel[];
}

const TURN = 2 * Math.PI;
const SLOT_S = 4;
const FIX_EVERY_S = 300;

/** A number in [0, 1) for a seed and three counts (integer mixing after Steele, Lea and Flood 2014). */
export function drawAt(seed: number, a: number, b: number, c: number): number {
  let hash = Math.imul(seed ^ 0x9e3779b9, 0x85ebca6b) ^ Math.imul(a + 0x7f4a7c15, 0xc2b2ae35);
  hash = Math.imul(hash ^ (hash >>> 15), 0x2c1b3c6d) ^ Math.imul(b + 0x165667b1, 0x27d4eb2f);
  hash = Math.imul(hash ^ (hash >>> 13), 0x297a2d39) ^ Math.imul(c + 0x1b873593, 0x9e3779b1);
  hash = Math.imul(hash ^ (hash >>> 16), 0x85ebca6b);
  hash = Math.imul(hash ^ (hash >>> 13), 0xc2b2ae35);
  return ((hash ^ (hash >>> 16)) >>> 0) / 4294967296;
}

/** The demo's water: 0.10 m/s uniform, a 0.25 m/s tide, a moving 0.25 m/s eddy and a shear. */
export const marrowBankWater: Water = (eastM, northM, timeS, out) => {
  const omega = TURN / (12.4206 * 3600);
  const [set, bearing, drift] = [70 / 180, 40 / 180, 40 / 180].map((half) => half * Math.PI);
  const major = 0.25 * Math.cos(omega * timeS);
  const minor = 0.05 * Math.sin(omega * timeS);
  const dx = eastM - 200 - 0.02 * timeS * Math.sin(drift!);
  const dy = northM + 100 - 0.02 * timeS * Math.cos(drift!);
  const rCore = 500 / 1.1209;
  const r2 = Math.max(1, dx * dx + dy * dy);
  const rest = (1 - Math.exp(-r2 / (rCore * rCore))) / r2;
  const swirl = (0.25 * 500 * rest) / (1 - Math.exp(-1.1209 * 1.1209));
  out[0] = 0.1 * Math.sin(set!) + major * Math.sin(bearing!) - minor * Math.cos(bearing!) - swirl * dy;
  out[1] = 0.1 * Math.cos(set!) + major * Math.cos(bearing!) + minor * Math.sin(bearing!) + swirl * dx;
  out[1] += eastM * 1e-4;
};

export function uniformWater(eastMps: number, northMps: number): Water {
  return (_east, _north, _time, out) => {
    out[0] = eastMps;
    out[1] = northMps;
  };
}

function launch(scene: Scene, index: number): Vessel {
  const start = scene.starts?.(index) ?? { eastM: -900, northM: 150 - 90 * index };
  const seed = scene.seed ?? 1;
  return {
    index,
    biasRad: (drawAt(seed, index, 0, 90) - 0.5) * 0.06,
    logScale: (drawAt(seed, index, 1, 90) - 0.5) * 0.04,
    guidance: startGuidance(missionFor(index, scene.count, scene.change)),
    input: {
      atS: 0, tickS: 1, eastM: 0, northM: 0, depthM: 0, positionSigmaM: 3, compassBiasRad: 0, logScale: 0,
      headingRad: 0, speedMps: 0, battery: 1, currentEastMps: 0, currentNorthMps: 0,
      loopCurrentEastMps: new Float64Array(64), loopCurrentNorthMps: new Float64Array(64),
      currentSigmaMps: 0.01, mapStale: false, orders: [],
    },
    out: { headingRad: 0, speedMps: 0, depthM: 0, state: 'waiting', reasons: [], phase: 0 },
    eastM: start.eastM, northM: start.northM, depthM: 0, headingRad: 0.7, speedMps: 0,
    battery: 1, begun: false, lostUntilS: 0, sequence: 0,
  };
}

/** A smooth error of unit rms, different for each vehicle and kind. */
function smooth(vessel: Vessel, kind: number, timeS: number): number {
  const shift = TURN * drawAt(vessel.index + 17, kind, 3, 91);
  return Math.sin(timeS / 181 + shift) * 0.9 + Math.sin(timeS / 467 + 2.3 * shift) * 1.09;
}

function perceive(scene: Scene, vessel: Vessel, timeS: number): void {
  const { input } = vessel;
  const water = new Float64Array(2);
  const mission = vessel.guidance.mission;
  input.atS = timeS;
  input.eastM = vessel.eastM + (scene.positionErrorM ?? 0) * smooth(vessel, 0, timeS);
  input.northM = vessel.northM + (scene.positionErrorM ?? 0) * smooth(vessel, 1, timeS);
  input.positionSigmaM = 3;
  if (timeS < vessel.lostUntilS) {
    input.positionSigmaM = 1000;
    input.eastM = mission.self.start.east_m;
    input.northM = mission.self.start.north_m;
  }
  input.depthM = vessel.depthM;
  input.compassBiasRad = vessel.biasRad;
  input.logScale = vessel.logScale;
  input.headingRad = vessel.headingRad + vessel.biasRad;
  input.speedMps = vessel.speedMps * (1 + vessel.logScale);
  input.battery = vessel.battery;
  input.orders = scene.ordersAt?.(vessel.index, timeS) ?? [];
  const error = scene.currentErrorMps ?? 0;
  scene.water(vessel.eastM, vessel.northM, timeS, water);
  input.currentEastMps = water[0]! + error * smooth(vessel, 2, timeS);
  input.currentNorthMps = water[1]! + error * smooth(vessel, 3, timeS);
  if (timeS % 60 !== 0) return;
  const { centre, radius_m: radiusM, turn } = mission.loop;
  const sense = turn === 'clockwise' ? 1 : -1;
  for (let k = 0; k < 64; k++) {
    const angle = (sense * TURN * k) / 64;
    scene.water(centre.east_m + radiusM * Math.sin(angle), centre.north_m + radiusM * Math.cos(angle), timeS, water);
    input.loopCurrentEastMps[k] = water[0]! + error * smooth(vessel, 2, timeS + 9 * k);
    input.loopCurrentNorthMps[k] = water[1]! + error * smooth(vessel, 3, timeS + 9 * k);
  }
}

const clamp = (value: number, least: number, most: number): number => Math.min(most, Math.max(least, value));

/** One second of a body, in ten steps. */
function move(scene: Scene, vessel: Vessel, timeS: number): void {
  const { self } = vessel.guidance.mission;
  const { out } = vessel;
  const water = new Float64Array(2);
  const wantedRad = out.headingRad - vessel.biasRad;
  const ordered = out.speedMps / (1 + vessel.logScale);
  const wantedMps = ordered <= 0 ? 0 : clamp(ordered, self.speedMin_mps, self.speedMax_mps);
  const turnRad = clamp(
    Math.atan2(Math.sin(wantedRad - vessel.headingRad), Math.cos(wantedRad - vessel.headingRad)),
    (-self.turnRate_degps * Math.PI) / 180, (self.turnRate_degps * Math.PI) / 180,
  );
  for (let part = 0; part < 10; part++) {
    vessel.headingRad += turnRad / 10;
    vessel.speedMps += (wantedMps - vessel.speedMps) * (1 - Math.exp(-0.1 / self.speedLag_s));
    scene.water(vessel.eastM, vessel.northM, timeS + part / 10, water);
    vessel.eastM += (vessel.speedMps * Math.sin(vessel.headingRad) + water[0]!) / 10;
    vessel.northM += (vessel.speedMps * Math.cos(vessel.headingRad) + water[1]!) / 10;
  }
  vessel.depthM = Math.max(0, vessel.depthM + clamp(out.depthM - vessel.depthM, -self.climb_mps, self.climb_mps));
  const powerW = self.powerHotel_W + self.powerCruise_W * (vessel.speedMps / self.cruise_mps) ** 3;
  vessel.battery = Math.max(0, vessel.battery - powerW / self.battery_J);
}

interface Flight {
  readonly arrivesS: number;
  readonly to: number;
  readonly frame: Frame;
}

function frameOf(vessel: Vessel, timeS: number): Frame {
  const { input, out } = vessel;
  vessel.sequence = (vessel.sequence + 1) % 256;
  return {
    senderIndex: vessel.index, sequence: vessel.sequence, timeMod4096S: timeS % 4096,
    eastM: Math.round(input.eastM), northM: Math.round(input.northM),
    phase: (Math.round(out.phase * 4096) % 4096) / 4096,
    stateIndex: AGENT_STATES.indexOf(out.state), positionUncertain: false, mapStale: false,
    batteryLow: isBatteryLow(vessel.guidance), note: null, haves: [0, 0, 0, 0, 0],
  };
}

interface Air {
  timeS: number;
  flights: Flight[];
  /** Whether a pair's last frame was lost. */
  readonly bad: Uint8Array;
}

/** Sends what is said in this second's slot; the losses of a pair come in runs of mean length `burst`. */
function send(scene: Scene, vessels: readonly Vessel[], air: Air): void {
  const { timeS, flights, bad } = air;
  if (timeS % SLOT_S !== 0) return;
  const from = vessels[(timeS / SLOT_S) % scene.count]!;
  if (!from.begun || timeS >= (scene.silentFromS?.(from.index) ?? Infinity)) return;
  const frame = frameOf(from, timeS);
  const loss = scene.loss ?? 0;
  const burst = Math.max(scene.burst ?? 1, 1 / (1 - loss));
  for (const to of vessels) {
    if (to === from) continue;
    const pair = from.index * scene.count + to.index;
    const chance = drawAt(scene.seed ?? 1, pair, timeS, 92);
    bad[pair] = chance < (bad[pair] === 1 ? 1 - 1 / burst : loss / ((1 - loss) * burst)) ? 1 : 0;
    if (bad[pair] === 1) continue;
    flights.push({ arrivesS: timeS + 2 + (scene.delayS ?? 0) * chance, to: to.index, frame });
  }
}

function deliver(vessels: readonly Vessel[], flights: readonly Flight[], timeS: number): Flight[] {
  for (const { arrivesS, to, frame } of flights) {
    if (arrivesS <= timeS && vessels[to]!.begun) hearPeer(vessels[to]!.guidance, frame, timeS);
  }
  return flights.filter(({ arrivesS }) => arrivesS > timeS);
}

/** The true cross-tracks and gap errors (shares of the target) of the vehicles that exist. */
class Line {
  readonly crossM: Float64Array[] = [];
  readonly gapOff: Float64Array[] = [];

  take(vessels: readonly Vessel[]): void {
    const { centre, radius_m: radiusM, turn } = vessels[0]!.guidance.mission.loop;
    const sense = turn === 'clockwise' ? 1 : -1;
    const here = vessels.filter(({ begun, out }) => begun && out.state !== 'homing' && out.state !== 'surfacing');
    const at = here.map(({ eastM, northM }) => {
      const turns = (sense * Math.atan2(eastM - centre.east_m, northM - centre.north_m)) / TURN;
      return turns - Math.floor(turns);
    }).sort((a, b) => a - b);
    this.crossM.push(Float64Array.from(here, ({ eastM, northM }) =>
      Math.sqrt((eastM - centre.east_m) ** 2 + (northM - centre.north_m) ** 2) - radiusM));
    this.gapOff.push(Float64Array.from(at, (phase, k) => {
      const gap = k + 1 < at.length ? at[k + 1]! - phase : at[0]! + 1 - phase;
      return gap * at.length - 1;
    }));
  }

  /** First time from which everything is within its bounds for ten minutes. */
  formUpS(count: number): number | null {
    let since = 0;
    for (let timeS = 0; timeS < this.crossM.length; timeS++) {
      const good = this.crossM[timeS]!.length === count
        && this.crossM[timeS]!.every((off) => Math.abs(off) <= 75)
        && this.gapOff[timeS]!.every((off) => Math.abs(off) <= 0.3);
      if (!good) since = timeS + 1;
      else if (timeS - since >= 600) return since;
    }
    return null;
  }
}

const rms = (rows: readonly Float64Array[]): number => {
  let sum = 0;
  let counted = 0;
  for (const row of rows) for (const value of row) { sum += value * value; counted += 1; }
  return Math.sqrt(sum / counted);
};

const greatest = (rows: readonly Float64Array[]): number =>
  rows.reduce((most, row) => row.reduce((so, value) => Math.max(so, Math.abs(value)), most), 0);

/** Runs a scene and measures it. */
export function runScene(scene: Scene): Result {
  const vessels = Array.from({ length: scene.count }, (_, index) => launch(scene, index));
  const line = new Line();
  const air: Air = { timeS: 0, flights: [], bad: new Uint8Array(scene.count ** 2) };
  const extremes = { separationM: Infinity, farthestM: 0 };
  for (let timeS = 0; timeS < scene.durationS; timeS++) {
    air.timeS = timeS;
    air.flights = deliver(vessels, air.flights, timeS);
    for (const vessel of vessels) {
      vessel.begun ||= timeS >= (scene.beginsAtS?.(vessel.index) ?? 0);
      if (scene.restarts?.some((one) => one.index === vessel.index && one.atS === timeS) === true) {
        vessel.guidance = startGuidance(vessel.guidance.mission);
        vessel.lostUntilS = FIX_EVERY_S * Math.ceil(timeS / FIX_EVERY_S);
      }
      if (!vessel.begun) continue;
      perceive(scene, vessel, timeS);
      guide(vessel.guidance, vessel.input, vessel.out);
    }
    send(scene, vessels, air);
    for (const vessel of vessels) if (vessel.begun) move(scene, vessel, timeS);
    line.take(vessels);
    spread(vessels, extremes);
    scene.onTick?.(timeS, vessels);
  }
  const formUpS = line.formUpS(scene.count);
  const from = scene.measureFromS ?? (formUpS ?? 0);
  return {
    formUpS,
    crossTrackRmsM: rms(line.crossM.slice(from)),
    crossTrackMaxM: greatest(line.crossM.slice(from)),
    gapRms: rms(line.gapOff.slice(from)),
    separationMinM: extremes.separationM,
    farthestM: extremes.farthestM,
    vessels,
  };
}

function spread(vessels: readonly Vessel[], extremes: { separationM: number; farthestM: number }): void {
  for (const one of vessels) {
    if (!one.begun) continue;
    const { centre } = one.guidance.mission.keepIn;
    const outM = Math.sqrt((one.eastM - centre.east_m) ** 2 + (one.northM - centre.north_m) ** 2);
    extremes.farthestM = Math.max(extremes.farthestM, outM);
    for (const other of vessels) {
      if (other.index <= one.index || !other.begun || Math.abs(other.depthM - one.depthM) > 5) continue;
      const east = other.eastM - one.eastM;
      const north = other.northM - one.northM;
      const down = other.depthM - one.depthM;
      const apartM = Math.sqrt(east * east + north * north + down * down);
      extremes.separationM = Math.min(extremes.separationM, apartM);
    }
  }
}
