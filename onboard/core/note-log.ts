/**
 * Every note that this vehicle holds, its own and its peers', once each, in canonical order: by end
 * time, then origin, then number. The order of arrival and repetition leave no trace.
 *
 * Capacity: 1023 notes per origin, all the numbers there are, so the log is never full.
 */
import { assert } from '../../messages/assert.ts';
import { NOTE_NUMBER_MAX, NOTE_SKIPPED_MAX, type Note } from '../../messages/frame.ts';

const NUMBERS = NOTE_NUMBER_MAX + 1;
const ABSENT = -1;
const SKIPPED = -2;

export interface NoteLog {
  readonly fleetSize: number;
  /** The notes in canonical order; places from `counts.total` on are empty. */
  readonly ordered: (Note | null)[];
  /** By origin and number: the note, or null. */
  readonly byNumber: (Note | null)[];
  /** By origin and number: −1 unknown, −2 declared skipped, 1 held. */
  readonly known: Int8Array;
  /** Per origin: every number up to here is held or declared skipped. */
  readonly heldUpTo: Int32Array;
  readonly newest: Int32Array;
  readonly counts: { total: number };
}

export function startNoteLog(fleetSize: number): NoteLog {
  return {
    fleetSize,
    ordered: new Array<Note | null>(fleetSize * NUMBERS).fill(null),
    byNumber: new Array<Note | null>(fleetSize * NUMBERS).fill(null),
    known: new Int8Array(fleetSize * NUMBERS).fill(ABSENT),
    heldUpTo: new Int32Array(fleetSize),
    newest: new Int32Array(fleetSize),
    counts: { total: 0 },
  };
}

/** Whether `a` stands before `b` in canonical order. */
function isBefore(a: Note, b: Note): boolean {
  if (a.endS !== b.endS) return a.endS < b.endS;
  if (a.originIndex !== b.originIndex) return a.originIndex < b.originIndex;
  return a.number < b.number;
}

/** Adds a note; answers its place in canonical order, or −1 if it is held already or declared skipped. */
export function addNote(log: NoteLog, note: Note): number {
  assert(note.originIndex < log.fleetSize, 'a note is of the fleet');
  const at = note.originIndex * NUMBERS + note.number;
  if (log.known[at] !== ABSENT) return -1;
  log.known[at] = 1;
  log.byNumber[at] = note;
  for (let back = 1; back <= Math.min(note.skipped, NOTE_SKIPPED_MAX, note.number - 1); back++) {
    if (log.known[at - back] === ABSENT) log.known[at - back] = SKIPPED;
  }
  log.newest[note.originIndex] = Math.max(log.newest[note.originIndex]!, note.number);
  raiseMark(log, note.originIndex);
  let place = log.counts.total;
  while (place > 0 && isBefore(note, log.ordered[place - 1]!)) {
    log.ordered[place] = log.ordered[place - 1]!;
    place -= 1;
  }
  log.ordered[place] = note;
  log.counts.total += 1;
  return place;
}

function raiseMark(log: NoteLog, origin: number): void {
  let mark = log.heldUpTo[origin]!;
  while (mark < NOTE_NUMBER_MAX && log.known[origin * NUMBERS + mark + 1] !== ABSENT) mark += 1;
  log.heldUpTo[origin] = mark;
}

/** The note of an origin by its number, or null if it is not held. */
export function noteByNumber(log: NoteLog, originIndex: number, number: number): Note | null {
  return log.byNumber[originIndex * NUMBERS + number] ?? null;
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
