/**
 * How the filter takes in one note.
 *
 * A note is m = (F2 − F1 − D)/T, D the dead-reckoned way through the water. With W the true one,
 * D = W + s W + β W⊥ (W⊥: W turned a right angle clockwise), so to first order
 *
 *   m = mean current over the path + (e2 − e1)/T − s W/T − β W⊥/T + white,   W/T = (end − start)/T − m.
 *
 * Two notes in a row share a fix: the old end error is the new start error, kept in the state. Where
 * the chain is broken, or its earlier note is missing, the start error is a fresh unknown.
 *
 * A note that is far off, or a run of notes that are somewhat off (a one-sided cumulative sum of the
 * normalised innovations), opens the filter up. This depends on the notes alone, in canonical order.
 */
import type { Note } from '../../messages/frame.ts';
import { modesAt } from './basis.ts';
import { TIDE_AT, moveState, renewState, type Filter, type FilterPlan } from './filter.ts';
import { PATH_POINTS, PATH_SHARES, PATH_WEIGHTS, writePath } from './note-path.ts';
import { predict } from './predict.ts';
import { absorb, compare } from './update.ts';

/** Places in `fit`: the normalised innovation squared of the last note, log determinant of its spread. */
export const DISTANCE2 = 0;
export const LOG_SPREAD = 1;

/** A long path is an arc only roughly: a tenth of its sag, in a current that changes by 10⁻⁴ per second. */
const PATH_DOUBT_PER_S = 1e-5;
/** A note's normalised misfit is 2 on average; what exceeds this adds up. */
const MISFIT_ALLOWED = 4;
/** What a surprise adds: to compass bias, log scale, new fix, uniform current, share of the modes' prior. */
const OPEN_BIAS_RAD = 0.1;
const OPEN_SCALE = 0.05;
const OPEN_FIX_M = 30;
const OPEN_UNIFORM_MPS = 0.1;
const OPEN_MODES = 0.5;

/** Writes the rows of the mean current over a note's path, for the state at the note's end. */
function writePathRows(plan: FilterPlan, note: Note): void {
  const { modes, rowEast, rowNorth, path } = plan.scratch;
  rowEast.fill(0);
  rowNorth.fill(0);
  rowEast[0] = 1;
  rowNorth[1] = 1;
  writePath(note, path);
  for (let point = 0; point < PATH_POINTS; point++) {
    const weight = PATH_WEIGHTS[point]!;
    const beforeEndS = (1 - PATH_SHARES[point]!) * note.durationS;
    const angle = plan.tidePerS * (note.endS - beforeEndS);
    rowEast[TIDE_AT]! += weight * Math.cos(angle);
    rowEast[TIDE_AT + 1]! += weight * Math.sin(angle);
    modesAt(plan.basis, path[2 * point]!, path[2 * point + 1]!, modes);
    for (let mode = 0; mode < plan.basis.count; mode++) {
      const east = weight * modes.east[mode]!;
      const north = weight * modes.north[mode]!;
      rowEast[plan.valueAt + mode]! += east;
      rowNorth[plan.valueAt + mode]! += north;
      rowEast[plan.rateAt + mode]! -= beforeEndS * east;
      rowNorth[plan.rateAt + mode]! -= beforeEndS * north;
    }
  }
  rowNorth[TIDE_AT + 2] = rowEast[TIDE_AT]!;
  rowNorth[TIDE_AT + 3] = rowEast[TIDE_AT + 1]!;
}

/** Writes the rows of a note's two components, for the state at its end: the same for every member. */
export function writeNoteRows(plan: FilterPlan, note: Note): void {
  const { rowEast, rowNorth } = plan.scratch;
  const { newFixAt } = plan;
  const fix = plan.fixAt + 2 * note.originIndex;
  const bias = plan.biasAt + 2 * note.originIndex;
  writePathRows(plan, note);
  const waterEast = (note.endEastM - note.startEastM) / note.durationS - note.currentEastMps;
  const waterNorth = (note.endNorthM - note.startNorthM) / note.durationS - note.currentNorthMps;
  rowEast[bias] = -waterNorth;
  rowNorth[bias] = waterEast;
  rowEast[bias + 1] = -waterEast;
  rowNorth[bias + 1] = -waterNorth;
  rowEast[fix] = -1 / note.durationS;
  rowNorth[fix + 1] = -1 / note.durationS;
  rowEast[newFixAt] = 1 / note.durationS;
  rowNorth[newFixAt + 1] = 1 / note.durationS;
}

/** Takes in a note whose rows are written and whose end is not before the filter's time. */
export function takeIn(plan: FilterPlan, filter: Filter, note: Note): void {
  const { size, newFixAt } = plan;
  const { innovation, fit } = plan.scratch;
  predict(plan, filter, Math.max(note.endS, filter.clock.atS));
  const origin = note.originIndex;
  const fix = plan.fixAt + 2 * origin;
  const isChained = note.chained && filter.lastNumber[origin] === note.number - 1 - note.skipped;
  if (!isChained) {
    renewState(filter, size, fix, note.fixSigmaM);
    renewState(filter, size, fix + 1, note.fixSigmaM);
  }
  renewState(filter, size, newFixAt, note.fixSigmaM);
  renewState(filter, size, newFixAt + 1, note.fixSigmaM);
  const pair = {
    east: note.currentEastMps - plan.given.east,
    north: note.currentNorthMps - plan.given.north,
    variance: plan.noteSigmaMps ** 2 + (PATH_DOUBT_PER_S * note.sagM) ** 2,
  };
  const distance2 = compare(plan, filter, pair);
  fit[DISTANCE2] = distance2;
  fit[LOG_SPREAD] = Math.log(innovation[2]! * innovation[4]! - innovation[3]! * innovation[3]!);
  if (isSurprising(plan, filter, origin, distance2)) {
    openUp(plan, filter, origin);
    compare(plan, filter, pair);
  }
  absorb(plan, filter);
  moveState(filter, size, newFixAt, fix);
  moveState(filter, size, newFixAt + 1, fix + 1);
  filter.lastNumber[origin] = note.number;
  filter.clock.cursor += 1;
}

/** Counts a note's misfit; true if with it the origin's notes have become too unlikely. */
function isSurprising(plan: FilterPlan, filter: Filter, origin: number, distance2: number): boolean {
  const { misfit } = filter;
  misfit[origin] = Math.max(0, misfit[origin]! + distance2 - MISFIT_ALLOWED);
  if (misfit[origin]! <= plan.surprise) return false;
  misfit[origin] = 0;
  return true;
}

/**
 * Something has changed: the origin's compass or log, the water, or its last fix was wrong. All of them
 * become uncertain again, so that this and the next notes, of all vehicles, can tell which it was.
 */
function openUp(plan: FilterPlan, filter: Filter, origin: number): void {
  const { covariance } = filter;
  const { size } = plan;
  const add = (at: number, sigma: number): void => {
    covariance[at * size + at]! += sigma * sigma;
  };
  add(plan.biasAt + 2 * origin, OPEN_BIAS_RAD);
  add(plan.biasAt + 2 * origin + 1, OPEN_SCALE);
  add(plan.newFixAt, OPEN_FIX_M);
  add(plan.newFixAt + 1, OPEN_FIX_M);
  add(0, OPEN_UNIFORM_MPS);
  add(1, OPEN_UNIFORM_MPS);
  const modeSigmaMps = OPEN_MODES * plan.modeSigmaMps;
  for (let mode = 0; mode < plan.basis.count; mode++) add(plan.valueAt + mode, modeSigmaMps);
}
