/**
 * Position and current, jointly: dead reckoning, fixes, own notes, peers' notes, one filter.
 *
 * Each fix that passes its gate ends a leg: the note of the leg is issued (on its grid, in the log, for
 * good), the fix becomes the new anchor, and the filter, which knows the fix's error as a state, blends
 * it with all else.
 */
import type { Note } from '../../messages/frame.ts';
import { chosen } from './bank.ts';
import { SPREAD_TICKS, type Estimator, type EstimatorTick } from './estimator-state.ts';
import { passesGate, takeFix } from './fixes.ts';
import { currentWithSpread, meanCurrentAt, takeIntoMap, workMap, type CurrentAnswer } from './map.ts';
import {
  addWay,
  meanPosition,
  movePosition,
  positionSpread,
  renewDrift,
  resetLeg,
  writePositionRows,
  type PositionAnswer,
} from './reckon.ts';
import { addTrack } from './track.ts';

export { startEstimator, type Estimator, type EstimatorTick } from './estimator-state.ts';
export type { CurrentAnswer, PositionAnswer };

/** A gap in the ticks longer than this many of them is a way that nobody reckoned. */
const GAP_TICKS = 5;
/** How wrong a guess from the pattern's open place may be, per axis. */
const GUESS_SIGMA_M = 60;

/** Moves dead reckoning to this tick and takes in its fix; answers the own note that the fix issued. */
export function reckonTick(estimator: Estimator, tick: EstimatorTick): Note | null {
  const { memory, map } = estimator;
  moveOn(estimator, tick);
  memory.sinceSpread += 1;
  const isStale = memory.changesSeen !== map.counts.changes || memory.sinceSpread >= SPREAD_TICKS;
  if (isStale) renewPosition(estimator);
  if (tick.fix === null) return null;
  if (!passesGate(estimator, tick.fix)) return null;
  const note = takeFix(estimator, tick.fix, tick.unrounded);
  memory.sinceSpread = SPREAD_TICKS;
  renewPosition(estimator);
  return note;
}

/** Takes in a peer's note (or an own one that a peer relays after a reboot). */
export function takeNote(estimator: Estimator, note: Note): 'new' | 'held' {
  return takeIntoMap(estimator.map, note) ? 'new' : 'held';
}

/** A bounded share of pending filtering; once per tick. */
export function workEstimator(estimator: Estimator): void {
  workMap(estimator.map);
}

/** Mean and covariance of the current at any place and time. */
export function currentAt(
  estimator: Estimator,
  at: { eastM: number; northM: number; atS: number },
  out: CurrentAnswer,
): void {
  currentWithSpread(estimator.map, at, out);
}

/** The mean current only, written to `out` as east, north. */
export function currentMeanAt(
  estimator: Estimator,
  at: { eastM: number; northM: number; atS: number },
  out: Float64Array,
): void {
  meanCurrentAt(estimator.map, at, out);
}

/** Own compass bias and log scale with their standard deviations. */
export interface BiasAnswer {
  compassBiasRad: number;
  compassBiasSigmaRad: number;
  logScale: number;
  logScaleSigma: number;
}

export function biasNow(estimator: Estimator, out: BiasAnswer): void {
  const { plan } = estimator.map;
  const active = chosen(estimator.map.active);
  const bias = plan.biasAt + 2 * estimator.selfIndex;
  out.compassBiasRad = active.mean[bias]!;
  out.logScale = active.mean[bias + 1]!;
  out.compassBiasSigmaRad = Math.sqrt(active.covariance[bias * plan.size + bias]!);
  out.logScaleSigma = Math.sqrt(active.covariance[(bias + 1) * plan.size + bias + 1]!);
}

/**
 * What peers say of this vehicle's own notes: the next one is numbered beyond, so that no number is
 * issued twice, even after a restart with lost memory.
 */
export function hearOwnNumber(estimator: Estimator, number: number): void {
  const { memory } = estimator;
  memory.ownNumberHeard = Math.max(memory.ownNumberHeard, number);
}

/** A start in the middle of a run, with memory lost: the start place says nothing of where it is now. */
export function startLost(estimator: Estimator): void {
  const { anchor, memory, mission } = estimator;
  anchor.eastM = mission.loop.centre.east_m;
  anchor.northM = mission.loop.centre.north_m;
  anchor.sigmaM = mission.keepIn.radius_m;
  anchor.isFix = false;
  memory.isLost = true;
}

export function isLost(estimator: Estimator): boolean {
  return estimator.memory.isLost;
}

/** Takes a rough place for the present one, until a fix comes. */
export function guessPosition(estimator: Estimator, eastM: number, northM: number): void {
  const { anchor, leg, memory } = estimator;
  anchor.eastM = eastM;
  anchor.northM = northM;
  anchor.sigmaM = GUESS_SIGMA_M;
  anchor.noteNumber = 0;
  anchor.isFix = false;
  resetLeg(leg, memory.lastAtS);
  memory.isLost = false;
  memory.sinceSpread = SPREAD_TICKS;
  renewPosition(estimator);
}

function moveOn(estimator: Estimator, tick: EstimatorTick): void {
  const { memory, leg, map, track, position, drift, selfIndex } = estimator;
  const eastMps = tick.speedMps * Math.sin(tick.headingRad);
  const northMps = tick.speedMps * Math.cos(tick.headingRad);
  if (memory.hasTicked && tick.atS - memory.lastAtS > GAP_TICKS * estimator.mission.tick_s)
    bridgeGap(estimator, tick.atS);
  if (memory.hasTicked) {
    const seconds = tick.atS - memory.lastAtS;
    const way = {
      midS: memory.lastAtS + seconds / 2,
      seconds,
      waterEastM: (seconds * (eastMps + memory.lastEastMps)) / 2,
      waterNorthM: (seconds * (northMps + memory.lastNorthMps)) / 2,
      eastM: position.eastM,
      northM: position.northM,
      carriedEastM: tick.given === null ? 0 : seconds * tick.given.eastMps,
      carriedNorthM: tick.given === null ? 0 : seconds * tick.given.northMps,
    };
    addWay(map.plan, leg, way);
    addTrack(track, way);
    const isFresh = memory.changesSeen === map.counts.changes;
    if (isFresh) movePosition(map, { leg, way, drift, selfIndex }, position);
  } else {
    resetLeg(leg, tick.atS);
    memory.hasTicked = true;
  }
  memory.lastAtS = tick.atS;
  memory.lastEastMps = eastMps;
  memory.lastNorthMps = northMps;
}

/** Time went by without ticks: the place is where it was, as uncertain as the vehicle is fast. */
function bridgeGap(estimator: Estimator, atS: number): void {
  const { anchor, leg, position, memory, mission } = estimator;
  const wayM = (atS - memory.lastAtS) * mission.self.speedMax_mps;
  anchor.eastM = position.eastM;
  anchor.northM = position.northM;
  anchor.sigmaM = Math.min(
    mission.keepIn.radius_m,
    Math.sqrt(position.varEastM2 + position.varNorthM2 + wayM * wayM),
  );
  anchor.noteNumber = 0;
  anchor.isFix = false;
  resetLeg(leg, atS);
  memory.lastAtS = atS;
  memory.sinceSpread = SPREAD_TICKS;
  memory.hasIssued = false;
}

/** The position anew from anchor, leg and map; its spread too, if that is due. */
function renewPosition(estimator: Estimator): void {
  const { map, leg, anchor, rows, position, memory, drift, selfIndex } = estimator;
  writePositionRows(map, { leg, anchor, selfIndex }, rows);
  meanPosition(map, { leg, anchor }, rows, position);
  renewDrift(map, leg, drift);
  memory.changesSeen = map.counts.changes;
  if (memory.sinceSpread < SPREAD_TICKS) return;
  memory.sinceSpread = 0;
  positionSpread(map, { anchor, selfIndex, whiteM2: memory.whitePerS * leg.seconds }, rows, position);
}
