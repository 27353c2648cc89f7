/**
 * What the estimator is told each tick and all that it remembers. Sized at start; nothing in it grows.
 */
import { radFromDeg } from '../../messages/angles.ts';
import type { Mission } from '../../messages/mission.ts';
import { startBasis } from './basis.ts';
import { layOut, type FilterPlan } from './filter.ts';
import { startMap, type CurrentMap } from './map.ts';
import { startNoteLog, type NoteLog } from './note-log.ts';
import {
  startDrift, startLeg, type Anchor, type Drift, type Leg, type PositionAnswer, type PositionRows,
} from './reckon.ts';
import { startTrack, type Track } from './track.ts';

const HOUR_S = 3600;
/** Ticks between two renewals of the stated position spread; a fix renews it at once. */
export const SPREAD_TICKS = 20;
/** The box of the map reaches this many loop radii from its centre, or lengths of the map if more. */
const BOX_RADII = 2;
/** The few modes of the map resolve no less than this share of the loop's radius. */
const LENGTH_RADII = 0.8;

export interface EstimatorTick {
  readonly atS: number;
  readonly headingRad: number;
  readonly speedMps: number;
  readonly fix: {
    readonly atS: number;
    readonly eastM: number;
    readonly northM: number;
    readonly sigmaM: number;
  } | null;
  /** The true current, in the yardstick run in which it is given; else null. */
  readonly given: { readonly eastMps: number; readonly northMps: number } | null;
  /** Whether own notes stay unrounded, as in the yardstick run in which all notes are shared at once. */
  readonly unrounded: boolean;
}

export interface Memory {
  hasTicked: boolean;
  lastAtS: number;
  lastEastMps: number;
  lastNorthMps: number;
  sinceSpread: number;
  /** Changes of the map that the drift has seen. */
  changesSeen: number;
  /** Fixes in a row that failed the gate. */
  refused: number;
  /** How far the last fix was off from where the vehicle thought it was. */
  offEastM: number;
  offNorthM: number;
  /** Whether this agent has issued a note since it started. */
  hasIssued: boolean;
  /** The greatest number that any peer has said of this vehicle's own notes. */
  ownNumberHeard: number;
  /** Whether the agent started in the middle of a run, and has no idea yet where it is. */
  isLost: boolean;
  whitePerS: number;
}

export interface Estimator {
  readonly mission: Mission;
  readonly selfIndex: number;
  readonly log: NoteLog;
  readonly map: CurrentMap;
  readonly leg: Leg;
  readonly anchor: Anchor;
  readonly rows: PositionRows;
  readonly track: Track;
  readonly position: PositionAnswer;
  readonly memory: Memory;
  readonly drift: Drift;
  /** Scratch: a current. */
  readonly current: Float64Array;
}

function planOf(mission: Mission): FilterPlan {
  const { onboard, loop, self } = mission;
  const lengthM = Math.max(onboard.mapLength_m, LENGTH_RADII * loop.radius_m);
  const box = {
    centreEastM: loop.centre.east_m,
    centreNorthM: loop.centre.north_m,
    halfM: BOX_RADII * Math.max(loop.radius_m, lengthM),
  };
  return layOut({
    basis: startBasis(box, lengthM, onboard.mapModes),
    fleetSize: mission.fleet.length,
    tidePerS: (2 * Math.PI) / onboard.tidePeriod_s,
    uniformSigmaMps: onboard.uniformSigma_mps,
    tideSigmaMps: onboard.tideSigma_mps,
    modeSigmaMps: onboard.mapSigma_mps,
    modePerS: Math.sqrt(3) / onboard.mapTime_s,
    biasSigmaRad: Math.max(1e-4, radFromDeg(self.compassBiasSigma_deg)),
    scaleSigma: Math.max(1e-4, self.logScaleSigma),
    biasGrowth: radFromDeg(onboard.compassDrift_deg) ** 2 / HOUR_S,
    scaleGrowth: onboard.logDrift ** 2 / HOUR_S,
    noteSigmaMps: onboard.noteSigma_mps,
    surprise: onboard.surprise,
  });
}

export function startEstimator(mission: Mission): Estimator {
  const plan = planOf(mission);
  const log = startNoteLog(mission.fleet.length);
  const { start } = mission.self;
  const sigmaM = mission.onboard.startSigma_m;
  return {
    mission,
    selfIndex: mission.fleet.findIndex(({ name }) => name === mission.vehicle),
    log,
    map: startMap(plan, log),
    leg: startLeg(plan.basis.count),
    anchor: { eastM: start.east_m, northM: start.north_m, sigmaM, noteNumber: 0, isFix: false },
    rows: { east: new Float64Array(plan.size), north: new Float64Array(plan.size) },
    track: startTrack(),
    drift: startDrift(plan.basis.count),
    current: new Float64Array(2),
    position: {
      eastM: start.east_m,
      northM: start.north_m,
      varEastM2: sigmaM ** 2,
      covEastNorthM2: 0,
      varNorthM2: sigmaM ** 2,
    },
    memory: {
      hasTicked: false,
      lastAtS: 0,
      lastEastMps: 0,
      lastNorthMps: 0,
      sinceSpread: SPREAD_TICKS,
      changesSeen: -1,
      refused: 0,
      offEastM: 0,
      offNorthM: 0,
      hasIssued: false,
      ownNumberHeard: 0,
      isLost: false,
      whitePerS:
        mission.self.logSigma_mps ** 2 +
        (mission.self.cruise_mps * radFromDeg(mission.self.compassSigma_deg)) ** 2,
    },
  };
}
