/**
 * The current map: a bank of filters over the notes in the log, always as if they had come in canonical
 * order.
 *
 * A note that is the last in order is taken in at once. A late one rewinds a second bank to the
 * nearest checkpoint before it, which then works its way back through the log, a bounded number of
 * notes a tick; until it is through, the first bank answers. So the same notes give the same map to
 * the last bit, whatever order they came in, once nothing is pending.
 */
import type { Note } from '../../messages/frame.ts';
import { bankPlans, chosen, copyBank, resetBank, startBank, takeIntoBank, type Bank } from './bank.ts';
import { modesAt } from './basis.ts';
import { TIDE_AT, type Filter, type FilterPlan } from './filter.ts';
import { addNote, noteAt, type NoteLog } from './note-log.ts';
import { transition } from './predict.ts';

const CHECKPOINTS_MAX = 10;
const CHECKPOINT_EVERY_S = 180;
/** Work of one tick, in covariance entries: a dozen notes for five vehicles, four for sixteen. */
const ENTRIES_PER_TICK = 60_000;

export interface CurrentMap {
  /** Layout of the state, alike for all members of the bank. */
  readonly plan: FilterPlan;
  readonly plans: readonly FilterPlan[];
  readonly log: NoteLog;
  /** Answers all questions. */
  readonly active: Bank;
  /** Works through late notes. */
  readonly working: Bank;
  /** Earlier states of the canonical line, oldest first; the first `counts.checkpoints` are filled. */
  readonly checkpoints: Bank[];
  readonly counts: { checkpoints: number; isBehind: boolean; changes: number };
  readonly scratch: {
    readonly east: Float64Array;
    readonly north: Float64Array;
    readonly gain: Float64Array;
  };
}

export function startMap(plan: FilterPlan, log: NoteLog): CurrentMap {
  const plans = bankPlans(plan);
  return {
    plan,
    plans,
    log,
    active: startBank(plans),
    working: startBank(plans),
    checkpoints: Array.from({ length: CHECKPOINTS_MAX }, () => startBank(plans)),
    counts: { checkpoints: 0, isBehind: false, changes: 0 },
    scratch: {
      east: new Float64Array(plan.size),
      north: new Float64Array(plan.size),
      gain: new Float64Array(plan.size),
    },
  };
}

/** Adds a note to log and map; false if it is held already or its number was declared skipped. */
export function takeIntoMap(map: CurrentMap, note: Note): boolean {
  const { log, active, counts } = map;
  const place = addNote(log, note);
  if (place < 0) return false;
  const isLast = place === log.counts.total - 1;
  if (isLast && !counts.isBehind) {
    takeIntoBank(map.plans, active, note);
    counts.changes += 1;
    keepCheckpoint(map, active);
    return true;
  }
  rewind(map, place);
  if (!isLast) return true;
  takeIntoBank(map.plans, active, note);
  counts.changes += 1;
  return true;
}

/** Sends the working bank back so that it will meet the note at `place`. */
function rewind(map: CurrentMap, place: number): void {
  const { counts, working, checkpoints } = map;
  while (counts.checkpoints > 0 && checkpoints[counts.checkpoints - 1]!.members[0]!.clock.cursor > place)
    counts.checkpoints -= 1;
  if (counts.isBehind && working.members[0]!.clock.cursor <= place) return;
  counts.isBehind = true;
  if (counts.checkpoints > 0) copyBank(checkpoints[counts.checkpoints - 1]!, working);
  else resetBank(map.plans, working);
}

/** A bounded share of pending work. */
export function workMap(map: CurrentMap): void {
  const { counts, working, log, plan, plans } = map;
  if (!counts.isBehind) return;
  const budget = Math.max(1, Math.floor(ENTRIES_PER_TICK / (plans.length * plan.size * plan.size)));
  for (let done = 0; done < budget && working.members[0]!.clock.cursor < log.counts.total; done++) {
    takeIntoBank(plans, working, noteAt(log, working.members[0]!.clock.cursor));
    keepCheckpoint(map, working);
  }
  if (working.members[0]!.clock.cursor < log.counts.total) return;
  copyBank(working, map.active);
  counts.changes += 1;
  counts.isBehind = false;
}

function timeOf(bank: Bank): number {
  return bank.members[0]!.clock.atS;
}

/** Keeps a state of the canonical line, if the last one kept is old enough; thins older ones out. */
function keepCheckpoint(map: CurrentMap, line: Bank): void {
  const { counts, checkpoints } = map;
  const last = counts.checkpoints === 0 ? null : checkpoints[counts.checkpoints - 1]!;
  if (last !== null && timeOf(line) - timeOf(last) < CHECKPOINT_EVERY_S) return;
  if (counts.checkpoints === CHECKPOINTS_MAX) dropOne(map, timeOf(line));
  copyBank(line, checkpoints[counts.checkpoints]!);
  counts.checkpoints += 1;
}

/** Drops the checkpoint whose loss widens its gap least for its age: spacing grows with age. */
function dropOne(map: CurrentMap, nowS: number): void {
  const { counts, checkpoints } = map;
  let drop = 0;
  let least = Infinity;
  for (let index = 0; index < counts.checkpoints - 1; index++) {
    const beforeS =
      index === 0 ? timeOf(checkpoints[0]!) - CHECKPOINT_EVERY_S : timeOf(checkpoints[index - 1]!);
    const afterS = timeOf(checkpoints[index + 1]!);
    const widened = (afterS - beforeS) / (nowS - beforeS);
    if (widened < least) {
      least = widened;
      drop = index;
    }
  }
  const freed = checkpoints[drop]!;
  for (let index = drop; index < counts.checkpoints - 1; index++)
    checkpoints[index] = checkpoints[index + 1]!;
  checkpoints[counts.checkpoints - 1] = freed;
  counts.checkpoints -= 1;
}

/** Mean and covariance of the current at a place and time. Caller-owned. */
export interface CurrentAnswer {
  eastMps: number;
  northMps: number;
  varEastM2ps2: number;
  covEastNorthM2ps2: number;
  varNorthM2ps2: number;
}

/** The plan of the filter that answers. */
export function planNow(map: CurrentMap): FilterPlan {
  return map.plans[map.active.choice.member]!;
}

/** The mean current at any place and time, written to `out` as east, north. */
export function meanCurrentAt(
  map: CurrentMap,
  at: { eastM: number; northM: number; atS: number },
  out: Float64Array,
): void {
  const plan = planNow(map);
  const active = chosen(map.active);
  const { mean } = active;
  const { modes } = plan.scratch;
  const f = transition(plan.modePerS, at.atS - filterTimeS(active, at.atS));
  const cos = Math.cos(plan.tidePerS * at.atS);
  const sin = Math.sin(plan.tidePerS * at.atS);
  let east = mean[0]! + cos * mean[TIDE_AT]! + sin * mean[TIDE_AT + 1]!;
  let north = mean[1]! + cos * mean[TIDE_AT + 2]! + sin * mean[TIDE_AT + 3]!;
  modesAt(plan.basis, at.eastM, at.northM, modes);
  for (let mode = 0; mode < plan.basis.count; mode++) {
    const value = f.valueOfValue * mean[plan.valueAt + mode]! + f.valueOfRate * mean[plan.rateAt + mode]!;
    east += value * modes.east[mode]!;
    north += value * modes.north[mode]!;
  }
  out[0] = east;
  out[1] = north;
}

/** The time of the filter's state, or `elseS` before any note. */
export function filterTimeS(filter: Filter, elseS: number): number {
  return filter.clock.cursor === 0 ? elseS : filter.clock.atS;
}

/** Mean and covariance of the current at any place and time. */
export function currentWithSpread(
  map: CurrentMap,
  at: { eastM: number; northM: number; atS: number },
  out: CurrentAnswer,
): void {
  const { scratch } = map;
  const plan = planNow(map);
  const active = chosen(map.active);
  const { modes } = plan.scratch;
  const { count } = plan.basis;
  meanCurrentAt(map, at, scratch.gain);
  out.eastMps = scratch.gain[0]!;
  out.northMps = scratch.gain[1]!;
  const f = transition(plan.modePerS, at.atS - filterTimeS(active, at.atS));
  const { east, north } = scratch;
  east.fill(0);
  north.fill(0);
  east[0] = 1;
  north[1] = 1;
  east[TIDE_AT] = Math.cos(plan.tidePerS * at.atS);
  east[TIDE_AT + 1] = Math.sin(plan.tidePerS * at.atS);
  north[TIDE_AT + 2] = east[TIDE_AT]!;
  north[TIDE_AT + 3] = east[TIDE_AT + 1]!;
  let newEast = 0;
  let newCross = 0;
  let newNorth = 0;
  for (let mode = 0; mode < count; mode++) {
    east[plan.valueAt + mode] = f.valueOfValue * modes.east[mode]!;
    north[plan.valueAt + mode] = f.valueOfValue * modes.north[mode]!;
    east[plan.rateAt + mode] = f.valueOfRate * modes.east[mode]!;
    north[plan.rateAt + mode] = f.valueOfRate * modes.north[mode]!;
    newEast += modes.east[mode]! ** 2;
    newCross += modes.east[mode]! * modes.north[mode]!;
    newNorth += modes.north[mode]! ** 2;
  }
  const fresh = f.newVariance * plan.modeSigmaMps ** 2;
  const { gain } = scratch;
  spreadOf(active, plan.size, { east, north, extent: plan.biasAt }, gain);
  out.varEastM2ps2 = gain[0]! + fresh * newEast;
  out.covEastNorthM2ps2 = gain[1]! + fresh * newCross;
  out.varNorthM2ps2 = gain[2]! + fresh * newNorth;
}

/** Variance east, covariance, variance north of two rows over the first `extent` states, to `out`. */
export function spreadOf(
  filter: Filter,
  size: number,
  of: { readonly east: Float64Array; readonly north: Float64Array; readonly extent: number },
  out: Float64Array,
): void {
  const { east, north, extent } = of;
  const { covariance } = filter;
  let varEast = 0;
  let cross = 0;
  let varNorth = 0;
  for (let row = 0; row < extent; row++) {
    const e = east[row]!;
    const n = north[row]!;
    if (e === 0 && n === 0) continue;
    const start = row * size;
    let sumEast = 0;
    let sumNorth = 0;
    for (let at = 0; at < row; at++) {
      const entry = covariance[start + at]!;
      sumEast += entry * east[at]!;
      sumNorth += entry * north[at]!;
    }
    const own = covariance[start + row]!;
    varEast += e * (2 * sumEast + own * e);
    cross += e * sumNorth + n * sumEast + own * e * n;
    varNorth += n * (2 * sumNorth + own * n);
  }
  out[0] = varEast;
  out[1] = cross;
  out[2] = varNorth;
}
