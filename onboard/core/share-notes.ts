/**
 * Sharing by `notes`: which note to say next, so that in the end everybody holds every note.
 *
 * Each frame says up to which number its sender holds every note of five origins (its marks). A note
 * is wanted as long as some peer's last mark lies below its number. Of the wanted notes that this
 * vehicle holds, the one that has been said least often is said, by whomever it was said; of those
 * said alike the one that ended first; then the lower origin. So a new note goes out at once, gaps
 * are filled oldest first, and vehicles that fill the same gap take different notes.
 *
 * Always holds: marks follow what a peer said last, not what it once said, so that a peer that lost
 * its memory is served again. Order and repetition of frames change what is said, never what is held.
 */
import { assert } from '../../messages/assert.ts';
import {
  HAVES_PER_FRAME, NOTE_NUMBER_MAX, havesFirstOrigin, type Frame, type Note,
} from '../../messages/frame.ts';
import { heldUpTo, isHeld, newestNumber, noteByNumber, noteEndS, type NoteLog } from './note-log.ts';

/** Says of a note are counted up to here; beyond it, all are alike. */
const SAID_MAX = 255;
const NUMBERS = NOTE_NUMBER_MAX + 1;
const NOTHING_SAID = -1e9;
const MARK_AHEAD_MAX = 32;

export interface NoteSharing {
  readonly selfIndex: number;
  readonly fleetSize: number;
  /** Notes come no faster than this. */
  readonly noteEveryS: number;
  /** The last mark of each peer for each origin, peer-major; 0 until it says otherwise. */
  readonly marks: Int32Array;
  /** Time of the frame that said it, per peer and origin. */
  readonly markedAtS: Float64Array;
  /** How often each note was said or heard, origin-major. */
  readonly said: Uint8Array;
}

export function startNoteSharing(selfIndex: number, fleetSize: number, noteEveryS: number): NoteSharing {
  assert(selfIndex >= 0 && selfIndex < fleetSize, 'a vehicle is of its fleet');
  return {
    selfIndex,
    fleetSize,
    noteEveryS,
    marks: new Int32Array(fleetSize * fleetSize),
    markedAtS: new Float64Array(fleetSize * fleetSize).fill(NOTHING_SAID),
    said: new Uint8Array(fleetSize * NUMBERS),
  };
}

/** Counts that a note was said, by this vehicle or another. */
function countSaid(sharing: NoteSharing, note: Note): void {
  const at = note.originIndex * NUMBERS + note.number;
  sharing.said[at] = Math.min(SAID_MAX, sharing.said[at]! + 1);
}

/**
 * The number that is `low` modulo 256, given the newest that this vehicle knows of: a peer is taken to
 * be at most 32 notes ahead of it, so up to 223 behind (18 h of five-minute notes) are told apart.
 */
function unwrapMark(low: number, newest: number): number {
  const turns = Math.floor((newest + MARK_AHEAD_MAX - low) / 256);
  return low + 256 * Math.max(0, turns);
}

/**
 * Takes in what a peer's frame says of its holdings; `frameAtS` is the frame's own time, unwrapped.
 * An older frame than the last that spoke of an origin changes nothing.
 */
export function hearHaves(sharing: NoteSharing, log: NoteLog, heard: { frame: Frame; frameAtS: number }): void {
  const { frame, frameAtS } = heard;
  const { fleetSize } = sharing;
  const first = havesFirstOrigin(frame.sequence, fleetSize);
  const count = Math.min(HAVES_PER_FRAME, fleetSize);
  for (let offset = 0; offset < count; offset++) {
    const origin = (first + offset) % fleetSize;
    const at = frame.senderIndex * fleetSize + origin;
    if (!(frameAtS >= sharing.markedAtS[at]!)) continue;
    sharing.markedAtS[at] = frameAtS;
    const newest = newestNumber(log, origin);
    // After a restart with lost memory the own number is unknown; time bounds how many there can be.
    const known = origin === sharing.selfIndex ? Math.max(newest, Math.floor(frameAtS / sharing.noteEveryS)) : newest;
    sharing.marks[at] = unwrapMark(frame.haves[offset]!, known);
  }
  if (frame.note !== null) countSaid(sharing, frame.note);
}

/** This vehicle's own haves for a frame of this sequence number, five numbers modulo 256. */
export function ownHaves(sharing: NoteSharing, log: NoteLog, sequence: number): number[] {
  const haves: number[] = [];
  const first = havesFirstOrigin(sequence, sharing.fleetSize);
  for (let offset = 0; offset < HAVES_PER_FRAME; offset++) {
    const known = offset < sharing.fleetSize;
    haves.push(known ? heldUpTo(log, (first + offset) % sharing.fleetSize) % 256 : 0);
  }
  return haves;
}

/** The lowest mark of any peer for one origin; the origin itself holds its own. */
function lowestMark(sharing: NoteSharing, origin: number): number {
  let lowest = NUMBERS;
  for (let peer = 0; peer < sharing.fleetSize; peer++) {
    if (peer === sharing.selfIndex) continue;
    lowest = Math.min(lowest, sharing.marks[peer * sharing.fleetSize + origin]!);
  }
  return lowest;
}

/** The note to say in the coming slot, counted as said; null when no peer wants any that is held. */
export function chooseNote(sharing: NoteSharing, log: NoteLog): Note | null {
  let chosenOrigin = -1;
  let chosenNumber = 0;
  let chosenSaid = SAID_MAX + 1;
  let chosenEndS = Infinity;
  for (let origin = 0; origin < sharing.fleetSize; origin++) {
    const newest = newestNumber(log, origin);
    for (let number = lowestMark(sharing, origin) + 1; number <= newest; number++) {
      const said = sharing.said[origin * NUMBERS + number]!;
      if (said > chosenSaid || !isHeld(log, origin, number)) continue;
      const endS = noteEndS(log, origin, number);
      if (said === chosenSaid && endS >= chosenEndS) continue;
      chosenOrigin = origin;
      chosenNumber = number;
      chosenSaid = said;
      chosenEndS = endS;
    }
  }
  if (chosenOrigin < 0) return null;
  const chosen = noteByNumber(log, chosenOrigin, chosenNumber);
  if (chosen !== null) countSaid(sharing, chosen);
  return chosen;
}

/** The greatest number that any peer has said of this vehicle's own notes: what it must not issue again. */
export function ownNumberHeard(sharing: NoteSharing): number {
  let greatest = 0;
  for (let peer = 0; peer < sharing.fleetSize; peer++) {
    if (peer === sharing.selfIndex) continue;
    greatest = Math.max(greatest, sharing.marks[peer * sharing.fleetSize + sharing.selfIndex]!);
  }
  return greatest;
}
