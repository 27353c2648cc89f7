/**
 * Position and current, jointly: dead reckoning, fixes, own notes, peers' notes, one filter.
 *
 * Each fix that passes its gate ends a leg: the note of the leg is issued (on its grid, in the log, for
 * good), the fix becomes the new anchor, and the filter, which knows the fix's error as a state, blends
 * it with all else. A fix that fails the gate is left out; several in a row that agree with each other
 * mean that the gate was wrong, and the last of them becomes a fresh anchor.
 */
import { radFromDeg } from '../../messages/angles.ts';
import { NOTE_NUMBER_MAX, NOTE_SKIPPED_MAX, roundedNote, type Note } from '../../messages/frame.ts';
import type { Mission } from '../../messages/mission.ts';
import { startBasis } from './basis.ts';
import { layOut, type FilterPlan } from './filter.ts';
import { currentWithSpread, meanCurrentAt, startMap, takeIntoMap, workMap, type CurrentAnswer, type CurrentMap } from './map.ts';
import { newestNumber, startNoteLog, type NoteLog } from './note-log.ts';
import {
  addWay, meanPosition, positionSpread, resetLeg, startLeg, writePositionRows,
  type Anchor, type Leg, type PositionAnswer, type PositionRows,
} from './reckon.ts';
import { addTrack, midTrack, startTrack, tailWay, trackCount, wayBack, type Track } from './track.ts';

export type { CurrentAnswer, PositionAnswer };

const HOUR_S = 3600;
/** A gap in the ticks longer than this many of them is a way that nobody reckoned. */
const GAP_TICKS = 5;
/** How wrong a guess from the pattern's open place may be, per axis. */
const GUESS_SIGMA_M = 60;
/** Ticks between two renewals of the stated position spread; a fix renews it at once. */
const SPREAD_TICKS = 10;
/** The box of the map reaches this many loop radii from its centre. */
const BOX_RADII = 2;
/** Fixes in a row that fail the gate before the gate is held to be wrong. */
const REFUSED_MAX = 3;

export interface EstimatorTick {
  readonly atS: number;
  readonly headingRad: number;
  readonly speedMps: number;
  readonly fix: { readonly atS: number; readonly eastM: number; readonly northM: number; readonly sigmaM: number } | null;
  /** The true current, in the yardstick run in which it is given; else null. */
  readonly given: { readonly eastMps: number; readonly northMps: number } | null;
  /** Whether own notes stay unrounded, as in the yardstick run in which all notes are shared at once. */
  readonly unrounded: boolean;
}

interface Memory {
  hasTicked: boolean;
  lastAtS: number;
  lastEastMps: number;
  lastNorthMps: number;
  sinceSpread: number;
  refused: number;
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
}

function planOf(mission: Mission): FilterPlan {
  const { onboard, loop, self } = mission;
  const box = {
    centreEastM: loop.centre.east_m, centreNorthM: loop.centre.north_m, halfM: BOX_RADII * loop.radius_m,
  };
  return layOut({
    basis: startBasis(box, onboard.mapLength_m, onboard.mapModes),
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
    position: {
      eastM: start.east_m, northM: start.north_m, varEastM2: sigmaM ** 2, covEastNorthM2: 0, varNorthM2: sigmaM ** 2,
    },
    memory: {
      hasTicked: false, lastAtS: 0, lastEastMps: 0, lastNorthMps: 0, sinceSpread: SPREAD_TICKS, refused: 0,
      hasIssued: false, ownNumberHeard: 0, isLost: false,
      whitePerS: mission.self.logSigma_mps ** 2
        + (mission.self.cruise_mps * radFromDeg(mission.self.compassSigma_deg)) ** 2,
    },
  };
}

/** Moves dead reckoning to this tick and takes in its fix; answers the own note that the fix issued. */
export function reckonTick(estimator: Estimator, tick: EstimatorTick): Note | null {
  moveOn(estimator, tick);
  renewPosition(estimator);
  if (tick.fix === null) return null;
  if (!passesGate(estimator, tick.fix)) return null;
  const note = takeFix(estimator, tick.fix, tick.unrounded);
  estimator.memory.sinceSpread = SPREAD_TICKS;
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
export function currentAt(estimator: Estimator, at: { eastM: number; northM: number; atS: number }, out: CurrentAnswer): void {
  currentWithSpread(estimator.map, at, out);
}

/** The mean current only, written to `out` as east, north. */
export function currentMeanAt(estimator: Estimator, at: { eastM: number; northM: number; atS: number }, out: Float64Array): void {
  meanCurrentAt(estimator.map, at, out);
}

export function positionNow(estimator: Estimator): PositionAnswer {
  return estimator.position;
}

/** Own compass bias and log scale with their standard deviations. */
export interface BiasAnswer {
  compassBiasRad: number;
  compassBiasSigmaRad: number;
  logScale: number;
  logScaleSigma: number;
}

export function biasNow(estimator: Estimator, out: BiasAnswer): void {
  const { plan, active } = estimator.map;
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
  const { memory, leg, map, track, position } = estimator;
  const eastMps = tick.speedMps * Math.sin(tick.headingRad);
  const northMps = tick.speedMps * Math.cos(tick.headingRad);
  if (memory.hasTicked && tick.atS - memory.lastAtS > GAP_TICKS * estimator.mission.tick_s) bridgeGap(estimator, tick.atS);
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
  anchor.sigmaM = Math.min(mission.keepIn.radius_m, Math.sqrt(position.varEastM2 + position.varNorthM2 + wayM * wayM));
  anchor.noteNumber = 0;
  anchor.isFix = false;
  resetLeg(leg, atS);
  memory.lastAtS = atS;
  memory.sinceSpread = SPREAD_TICKS;
  memory.hasIssued = false;
}

function renewPosition(estimator: Estimator): void {
  const { map, leg, anchor, rows, position, memory, selfIndex } = estimator;
  writePositionRows(map, { leg, anchor, selfIndex }, rows);
  meanPosition(map, { leg, anchor }, rows, position);
  memory.sinceSpread += 1;
  if (memory.sinceSpread < SPREAD_TICKS) return;
  memory.sinceSpread = 0;
  positionSpread(map, { anchor, selfIndex, whiteM2: memory.whitePerS * leg.seconds }, rows, position);
}

type EstimatorFix = NonNullable<EstimatorTick['fix']>;

/** Whether a fix is near enough to where the vehicle thinks it was; or the gate is held to be wrong. */
function passesGate(estimator: Estimator, fix: EstimatorFix): boolean {
  const { memory, position, rows, map, leg, anchor, selfIndex, track } = estimator;
  positionSpread(map, { anchor, selfIndex, whiteM2: memory.whitePerS * leg.seconds }, rows, position);
  const then = tailWay(track, fix.atS);
  const drift = new Float64Array(2);
  meanCurrentAt(map, { eastM: position.eastM, northM: position.northM, atS: fix.atS }, drift);
  const east = fix.eastM - (position.eastM - then.waterEastM - drift[0]! * then.seconds);
  const north = fix.northM - (position.northM - then.waterNorthM - drift[1]! * then.seconds);
  const varEast = position.varEastM2 + fix.sigmaM ** 2;
  const varNorth = position.varNorthM2 + fix.sigmaM ** 2;
  const cross = position.covEastNorthM2;
  const determinant = varEast * varNorth - cross * cross;
  const distance2 = (varNorth * east * east - 2 * cross * east * north + varEast * north * north) / determinant;
  if (distance2 <= estimator.mission.onboard.fixGate ** 2) {
    memory.refused = 0;
    return true;
  }
  memory.refused += 1;
  if (memory.refused < REFUSED_MAX) return false;
  memory.refused = 0;
  anchor.isFix = false;
  return true;
}

/** Ends the leg at the fix: issues its note, if there is one, and starts the next leg there. */
function takeFix(estimator: Estimator, fix: EstimatorFix, unrounded: boolean): Note | null {
  const { anchor, leg, map, mission, track } = estimator;
  const tail = tailWay(track, fix.atS);
  const seconds = fix.atS - leg.startS;
  const { noteLeast_s: leastS, noteMost_s: mostS } = mission.onboard;
  if (anchor.isFix && seconds < leastS) return null;
  let note: Note | null = null;
  if (anchor.isFix && seconds <= mostS) note = issueNote(estimator, fix, { ...tail, unrounded });
  anchor.eastM = fix.eastM;
  anchor.northM = fix.northM;
  anchor.sigmaM = fix.sigmaM;
  anchor.noteNumber = note === null ? 0 : note.number;
  anchor.isFix = true;
  estimator.memory.isLost = false;
  resetLeg(leg, fix.atS);
  const ways = trackCount(track);
  for (let back = ways; back >= 1; back--) {
    const way = wayBack(track, back);
    if (way.midS > fix.atS) addWay(map.plan, leg, way);
  }
  return note;
}

function issueNote(
  estimator: Estimator, fix: EstimatorFix, tail: { waterEastM: number; waterNorthM: number; carriedEastM: number; carriedNorthM: number; unrounded: boolean },
): Note | null {
  const { anchor, leg, log, memory, selfIndex, track, map } = estimator;
  const last = Math.max(newestNumber(log, selfIndex), memory.ownNumberHeard);
  const skip = !memory.hasIssued && last > 0 ? NOTE_SKIPPED_MAX : 0;
  const number = last + 1 + skip;
  if (number > NOTE_NUMBER_MAX) return null;
  const seconds = fix.atS - leg.startS;
  const waterEastM = leg.waterEastM - tail.waterEastM;
  const waterNorthM = leg.waterNorthM - tail.waterNorthM;
  const raw: Note = {
    originIndex: selfIndex,
    number,
    endS: Math.max(0, fix.atS),
    durationS: seconds,
    currentEastMps: (fix.eastM - anchor.eastM - waterEastM) / seconds,
    currentNorthMps: (fix.northM - anchor.northM - waterNorthM) / seconds,
    startEastM: anchor.eastM,
    startNorthM: anchor.northM,
    endEastM: fix.eastM,
    endNorthM: fix.northM,
    sagM: sagOf(track, anchor, fix, { midS: leg.startS + seconds / 2 }),
    chained: anchor.noteNumber > 0 && anchor.noteNumber === last,
    fixSigmaM: fix.sigmaM,
    skipped: skip,
  };
  memory.hasIssued = true;
  const note = tail.unrounded ? raw : roundedNote(raw);
  map.plan.given.east = (leg.carriedEastM - tail.carriedEastM) / seconds;
  map.plan.given.north = (leg.carriedNorthM - tail.carriedNorthM) / seconds;
  takeIntoMap(map, note);
  map.plan.given.east = 0;
  map.plan.given.north = 0;
  return note;
}

/** How far the middle of the way lies to the right of the chord between its fixes. */
function sagOf(track: Track, from: Anchor, to: EstimatorFix, at: { midS: number }): number {
  const middle = midTrack(track, at.midS);
  if (middle === null) return 0;
  const east = to.eastM - from.eastM;
  const north = to.northM - from.northM;
  const chordM = Math.sqrt(east * east + north * north);
  if (!(chordM > 1)) return 0;
  const offEast = middle.eastM - (from.eastM + to.eastM) / 2;
  const offNorth = middle.northM - (from.northM + to.northM) / 2;
  return (offEast * north - offNorth * east) / chordM;
}
