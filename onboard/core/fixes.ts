/**
 * What a fix does: it passes its gate or is left out, ends the leg, issues the leg's note and becomes
 * the new anchor. A fix that fails the gate is left out, once; a second that is off in the same
 * direction, or a third of any kind, is believed: compass, log or water have changed, and the filter,
 * which sees it in the note, finds out which (`take-note.ts`).
 */
import { NOTE_NUMBER_MAX, NOTE_SKIPPED_MAX, roundedNote, type Note } from '../../messages/frame.ts';
import type { Estimator, EstimatorTick, Memory } from './estimator-state.ts';
import { meanCurrentAt, takeIntoMap } from './map.ts';
import { newestNumber } from './note-log.ts';
import { addWay, positionSpread, resetLeg, writePositionRows } from './reckon.ts';
import { midTrack, tailWay, trackCount, wayBack } from './track.ts';

/** Fixes in a row that fail the gate before the gate is held to be wrong, whatever they say. */
const REFUSED_MAX = 3;
/** Two fixes are off in the same direction within this cosine, and by a ratio within these bounds. */
const SAME_WAY_COSINE = 0.6;
const SAME_WAY_LEAST = 0.4;
const SAME_WAY_MOST = 3.5;

type EstimatorFix = NonNullable<EstimatorTick['fix']>;

/** Whether a fix is near enough to where the vehicle thinks it was; or the gate is held to be wrong. */
export function passesGate(estimator: Estimator, fix: EstimatorFix): boolean {
  const { memory, position, rows, map, leg, anchor, selfIndex, track, current } = estimator;
  writePositionRows(map, { leg, anchor, selfIndex }, rows);
  positionSpread(map, { anchor, selfIndex, whiteM2: memory.whitePerS * leg.seconds }, rows, position);
  const then = tailWay(track, fix.atS);
  meanCurrentAt(map, { eastM: position.eastM, northM: position.northM, atS: fix.atS }, current);
  const east = fix.eastM - (position.eastM - then.waterEastM - current[0]! * then.seconds);
  const north = fix.northM - (position.northM - then.waterNorthM - current[1]! * then.seconds);
  const varEast = position.varEastM2 + fix.sigmaM ** 2;
  const varNorth = position.varNorthM2 + fix.sigmaM ** 2;
  const cross = position.covEastNorthM2;
  const determinant = varEast * varNorth - cross * cross;
  const distance2 =
    (varNorth * east * east - 2 * cross * east * north + varEast * north * north) / determinant;
  const isNear = distance2 <= estimator.mission.onboard.fixGate ** 2;
  const isAgain = memory.refused + 1 >= REFUSED_MAX || (memory.refused > 0 && isSameWay(memory, east, north));
  const isBelieved = isNear || isAgain;
  memory.refused = isBelieved ? 0 : memory.refused + 1;
  memory.offEastM = east;
  memory.offNorthM = north;
  return isBelieved;
}

/** Whether a fix is off much as the refused one before it was: a drift or a jump, not two outliers. */
function isSameWay(memory: Memory, eastM: number, northM: number): boolean {
  const beforeM2 = memory.offEastM ** 2 + memory.offNorthM ** 2;
  const ratio2 = (eastM ** 2 + northM ** 2) / beforeM2;
  const along = eastM * memory.offEastM + northM * memory.offNorthM;
  if (along <= SAME_WAY_COSINE * beforeM2 * Math.sqrt(ratio2)) return false;
  return ratio2 >= SAME_WAY_LEAST ** 2 && ratio2 <= SAME_WAY_MOST ** 2;
}

/** Ends the leg at the fix: issues its note, if there is one, and starts the next leg there. */
export function takeFix(estimator: Estimator, fix: EstimatorFix, unrounded: boolean): Note | null {
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
  estimator: Estimator,
  fix: EstimatorFix,
  tail: {
    waterEastM: number;
    waterNorthM: number;
    carriedEastM: number;
    carriedNorthM: number;
    unrounded: boolean;
  },
): Note | null {
  const { anchor, leg, log, memory, selfIndex, map } = estimator;
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
    sagM: sagOf(estimator, fix, leg.startS + seconds / 2),
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

/**
 * How far the middle of the way lies to the right of the chord between its fixes: the place believed
 * then, and half of what the end turned out to be off.
 */
function sagOf(estimator: Estimator, to: EstimatorFix, midS: number): number {
  const { anchor: from, track, memory } = estimator;
  const middle = midTrack(track, midS);
  if (middle === null) return 0;
  const east = to.eastM - from.eastM;
  const north = to.northM - from.northM;
  const chordM = Math.sqrt(east * east + north * north);
  if (!(chordM > 1)) return 0;
  const offEast = middle.eastM + memory.offEastM / 2 - (from.eastM + to.eastM) / 2;
  const offNorth = middle.northM + memory.offNorthM / 2 - (from.northM + to.northM) / 2;
  return (offEast * north - offNorth * east) / chordM;
}
