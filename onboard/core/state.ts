/**
 * All that an agent remembers. Sized at start; nothing in it grows; written by `step` and the parts
 * that it calls, and by nobody else.
 */
import { assert } from '../../messages/assert.ts';
import type { Note } from '../../messages/frame.ts';
import type { Mission } from '../../messages/mission.ts';
import { startEstimator, type BiasAnswer, type CurrentAnswer, type Estimator } from './estimator.ts';
import { startGuidance, type Guidance, type GuidanceInput, type GuidanceOutput } from './guidance.ts';
import { makeLoop, pointAt, type Loop } from './loop.ts';
import { startNoteSharing, type NoteSharing } from './share-notes.ts';
import { startTalk, type Talk } from './talk.ts';

/** Phases at which the agent keeps its current along the loop: 0/64 … 63/64. */
export const MAP_POINTS = 64;

/** The current along the agent's own loop, by its map. */
export interface LoopTable {
  readonly pointEastM: Float64Array;
  readonly pointNorthM: Float64Array;
  readonly currentEastMps: Float64Array;
  readonly currentNorthMps: Float64Array;
  /** Standard deviation of the vector's norm; renewed a few points a tick. */
  readonly sigmaMps: Float64Array;
}

export interface State {
  readonly mission: Mission;
  readonly selfIndex: number;
  readonly loop: Loop;
  readonly estimator: Estimator;
  readonly guidance: Guidance;
  readonly sharing: NoteSharing;
  readonly talk: Talk;
  readonly table: LoopTable;
  /** The current at the own place with its covariance, and at one point of the loop. */
  readonly here: CurrentAnswer;
  readonly there: CurrentAnswer;
  readonly meanHere: Float64Array;
  readonly meanPoint: Float64Array;
  readonly bias: BiasAnswer;
  readonly counts: {
    hasBegun: boolean;
    /** The own note that this tick issued, or null. */
    issued: Note | null;
  };
  readonly guidanceIn: GuidanceInput;
  readonly guidanceOut: GuidanceOutput;
}

function startTable(loop: Loop): LoopTable {
  const pointEastM = new Float64Array(MAP_POINTS);
  const pointNorthM = new Float64Array(MAP_POINTS);
  const place = new Float64Array(2);
  for (let index = 0; index < MAP_POINTS; index++) {
    pointAt(loop, index / MAP_POINTS, place);
    pointEastM[index] = place[0]!;
    pointNorthM[index] = place[1]!;
  }
  return {
    pointEastM,
    pointNorthM,
    currentEastMps: new Float64Array(MAP_POINTS),
    currentNorthMps: new Float64Array(MAP_POINTS),
    sigmaMps: new Float64Array(MAP_POINTS),
  };
}

function noCurrent(): CurrentAnswer {
  return { eastMps: 0, northMps: 0, varEastM2ps2: 0, covEastNorthM2ps2: 0, varNorthM2ps2: 0 };
}

/** The state of an agent that has perceived nothing yet. */
export function start(mission: Mission): State {
  const selfIndex = mission.fleet.findIndex(({ name }) => name === mission.vehicle);
  assert(selfIndex >= 0, 'a vehicle is of its own fleet');
  const loop = makeLoop(mission.loop);
  const table = startTable(loop);
  return {
    mission,
    selfIndex,
    loop,
    estimator: startEstimator(mission),
    guidance: startGuidance(mission),
    sharing: startNoteSharing(
      selfIndex, mission.fleet.length, Math.max(mission.self.fixEvery_s, mission.onboard.noteLeast_s),
    ),
    talk: startTalk(mission, selfIndex),
    table,
    here: noCurrent(),
    there: noCurrent(),
    meanHere: new Float64Array(2),
    meanPoint: new Float64Array(2),
    bias: { compassBiasRad: 0, compassBiasSigmaRad: 0, logScale: 0, logScaleSigma: 0 },
    counts: { hasBegun: false, issued: null },
    guidanceIn: {
      atS: 0, tickS: mission.tick_s, eastM: 0, northM: 0, depthM: 0, positionSigmaM: 0, compassBiasRad: 0,
      logScale: 0, headingRad: 0, speedMps: 0, battery: 1, currentEastMps: 0, currentNorthMps: 0,
      loopCurrentEastMps: table.currentEastMps, loopCurrentNorthMps: table.currentNorthMps,
      currentSigmaMps: 0, mapStale: true, orders: [],
    },
    guidanceOut: { headingRad: 0, speedMps: 0, depthM: 0, state: 'waiting', reasons: [], phase: 0 },
  };
}
