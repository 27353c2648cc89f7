/**
 * Every note that this vehicle holds, its own and its peers', once each, in canonical order: by end
 * time, then origin, then number. The order of arrival and repetition leave no trace.
 *
 * Numbers only, in arrays sized at start: a note's fields stand in a row by origin and number, and an
 * order over those rows stands beside them. Capacity: 1023 notes per origin, all the numbers there
 * are (at 5 min a note 85 h, at 1 min 17 h), so the log is never full; an origin that has used up its
 * numbers issues no more notes (`fixes.ts`).
 */
import { assert } from '../../messages/assert.ts';
import { NOTE_NUMBER_MAX, NOTE_SKIPPED_MAX, type Note } from '../../messages/frame.ts';

const NUMBERS = NOTE_NUMBER_MAX + 1;
const UNKNOWN = 0;
const HELD = 1;
const SKIPPED = 2;

/** What stands where in a note's row. */
const END_S = 0;
const DURATION_S = 1;
const CURRENT_EAST = 2;
const CURRENT_NORTH = 3;
const START_EAST = 4;
const START_NORTH = 5;
const END_EAST = 6;
const END_NORTH = 7;
const SAG = 8;
const FIX_SIGMA = 9;
const CHAINED = 10;
const SKIPS = 11;
const FIELDS = 12;

export interface NoteLog {
  readonly fleetSize: number;
  /** Rows of the notes held, in canonical order; places from `counts.total` on are empty. */
  readonly order: Int32Array;
  /** By row (origin, then number): the fields of a note that is held. */
  readonly fields: Float64Array;
  /** By row: unknown, held, or declared skipped. */
  readonly known: Uint8Array;
  /** Per origin: every number up to here is held or declared skipped. */
  readonly heldUpTo: Int32Array;
  readonly newest: Int32Array;
  readonly counts: { total: number };
}

export function startNoteLog(fleetSize: number): NoteLog {
  return {
    fleetSize,
    order: new Int32Array(fleetSize * NUMBERS),
    fields: new Float64Array(fleetSize * NUMBERS * FIELDS),
    known: new Uint8Array(fleetSize * NUMBERS),
    heldUpTo: new Int32Array(fleetSize),
    newest: new Int32Array(fleetSize),
    counts: { total: 0 },
  };
}

/** Whether row `a` stands before row `b` in canonical order; rows grow by origin, then number. */
function isBefore(log: NoteLog, a: number, b: number): boolean {
  const endA = log.fields[a * FIELDS + END_S]!;
  const endB = log.fields[b * FIELDS + END_S]!;
  return endA === endB ? a < b : endA < endB;
}

/** Adds a note; answers its place in canonical order, or −1 if it is held already or declared skipped. */
export function addNote(log: NoteLog, note: Note): number {
  assert(note.originIndex < log.fleetSize, 'a note is of the fleet');
  assert(note.number >= 1 && note.number <= NOTE_NUMBER_MAX, 'note numbers run from 1 to 1023');
  const row = note.originIndex * NUMBERS + note.number;
  if (log.known[row] !== UNKNOWN) return -1;
  log.known[row] = HELD;
  writeRow(log.fields, row * FIELDS, note);
  for (let back = 1; back <= Math.min(note.skipped, NOTE_SKIPPED_MAX, note.number - 1); back++) {
    if (log.known[row - back] === UNKNOWN) log.known[row - back] = SKIPPED;
  }
  log.newest[note.originIndex] = Math.max(log.newest[note.originIndex]!, note.number);
  raiseMark(log, note.originIndex);
  let place = log.counts.total;
  while (place > 0 && isBefore(log, row, log.order[place - 1]!)) {
    log.order[place] = log.order[place - 1]!;
    place -= 1;
  }
  log.order[place] = row;
  log.counts.total += 1;
  return place;
}

function writeRow(fields: Float64Array, at: number, note: Note): void {
  fields[at + END_S] = note.endS;
  fields[at + DURATION_S] = note.durationS;
  fields[at + CURRENT_EAST] = note.currentEastMps;
  fields[at + CURRENT_NORTH] = note.currentNorthMps;
  fields[at + START_EAST] = note.startEastM;
  fields[at + START_NORTH] = note.startNorthM;
  fields[at + END_EAST] = note.endEastM;
  fields[at + END_NORTH] = note.endNorthM;
  fields[at + SAG] = note.sagM;
  fields[at + FIX_SIGMA] = note.fixSigmaM;
  fields[at + CHAINED] = note.chained ? 1 : 0;
  fields[at + SKIPS] = note.skipped;
}

function readRow(log: NoteLog, row: number): Note {
  const { fields } = log;
  const at = row * FIELDS;
  return {
    originIndex: Math.floor(row / NUMBERS),
    number: row % NUMBERS,
    endS: fields[at + END_S]!,
    durationS: fields[at + DURATION_S]!,
    currentEastMps: fields[at + CURRENT_EAST]!,
    currentNorthMps: fields[at + CURRENT_NORTH]!,
    startEastM: fields[at + START_EAST]!,
    startNorthM: fields[at + START_NORTH]!,
    endEastM: fields[at + END_EAST]!,
    endNorthM: fields[at + END_NORTH]!,
    sagM: fields[at + SAG]!,
    fixSigmaM: fields[at + FIX_SIGMA]!,
    chained: fields[at + CHAINED] === 1,
    skipped: fields[at + SKIPS]!,
  };
}

function raiseMark(log: NoteLog, origin: number): void {
  let mark = log.heldUpTo[origin]!;
  while (mark < NOTE_NUMBER_MAX && log.known[origin * NUMBERS + mark + 1] !== UNKNOWN) mark += 1;
  log.heldUpTo[origin] = mark;
}

/** The note at a place in canonical order. */
export function noteAt(log: NoteLog, place: number): Note {
  assert(place >= 0 && place < log.counts.total, 'a place holds a note');
  return readRow(log, log.order[place]!);
}

export function isHeld(log: NoteLog, originIndex: number, number: number): boolean {
  return log.known[originIndex * NUMBERS + number] === HELD;
}

/** When the note of an origin ended; it is held. */
export function noteEndS(log: NoteLog, originIndex: number, number: number): number {
  return log.fields[(originIndex * NUMBERS + number) * FIELDS + END_S]!;
}

/** The note of an origin by its number, or null if it is not held. */
export function noteByNumber(log: NoteLog, originIndex: number, number: number): Note | null {
  return isHeld(log, originIndex, number) ? readRow(log, originIndex * NUMBERS + number) : null;
}

/** The number up to which every note of an origin is held or declared skipped; 0 if none. */
export function heldUpTo(log: NoteLog, originIndex: number): number {
  return log.heldUpTo[originIndex]!;
}

/** The greatest number of an origin that is held; 0 if none. */
export function newestNumber(log: NoteLog, originIndex: number): number {
  return log.newest[originIndex]!;
}

export function noteCount(log: NoteLog): number {
  return log.counts.total;
}
