/**
 * The acoustic frame: 256 bits that one vehicle says in its slot, and all that its peers get to know.
 *
 * | field    | bits | meaning, resolution and range                                              |
 * | -------- | ---- | -------------------------------------------------------------------------- |
 * | version  | 3    | 1                                                                          |
 * | sender   | 4    | place in the fleet list, 0 to 15                                           |
 * | sequence | 8    | counts the sender's frames, modulo 256                                     |
 * | time     | 12   | the sender's clock at the position below, whole seconds modulo 4096        |
 * | east     | 13   | position from the datum, 1 m, ±4095 m                                      |
 * | north    | 13   |                                                                            |
 * | phase    | 12   | place on the loop, 1/4096 turn                                             |
 * | state    | 3    | agent state, its place in AGENT_STATES                                     |
 * | health   | 3    | bit 0 position uncertain, bit 1 map stale, bit 2 battery low               |
 * | note     | 128  | one note, its own or another's; duration 0 says that there is none         |
 * | haves    | 40   | for five origins: the number up to which every note is held, modulo 256    |
 * | spare    | 1    | 0                                                                          |
 * | check    | 16   | CRC-16/IBM-3740 over the bytes before it                                   |
 *
 * A note: origin 4, number 10 (from 1), end 17 (s of the origin's clock, to 36.4 h), duration 11 (s),
 * mean current east and north 12 each (1 mm/s, ±2.047 m/s), start and end of its path 12 × 4 (2 m,
 * ±4094 m), sag 6 (how far the path's middle lies to the right of its chord: a signed code whose square
 * counts 0.8 m, to ±769 m), chained 1 (its first fix is the last fix of the note before), fix sigma 4
 * (5·2^((k−7)/2) m, 0.44 to 80 m), skipped 3 (that many numbers before it were never issued).
 *
 * Haves start at origin (5 × sequence) mod fleet size, so that in larger fleets origins take turns.
 * Both directions keep no state. Decoding answers value or reason and never throws.
 */
import { assert } from './assert.ts';
import { fixedPointMax, fromCode, getBits, putBits, toCode, type FixedPoint } from './bits.ts';
import { crc16 } from './crc.ts';

export const FRAME_BYTES = 32;
export const FRAME_VERSION = 1;
export const FLEET_MAX = 16;
export const HAVES_PER_FRAME = 5;
export const NOTE_NUMBER_MAX = 1023;
export const NOTE_SKIPPED_MAX = 7;

/** The agent's states, in the order of their codes on the link. */
export const AGENT_STATES = ['waiting', 'joining', 'holding', 'homing', 'surfacing'] as const;
export type AgentState = (typeof AGENT_STATES)[number];

const MAP_POSITION: FixedPoint = { width: 13, step: 1, signed: true };
const PHASE_CODES = 4096;
const END_TIME: FixedPoint = { width: 17, step: 1, signed: false };
const DURATION: FixedPoint = { width: 11, step: 1, signed: false };
const CURRENT: FixedPoint = { width: 12, step: 0.001, signed: true };
const PATH: FixedPoint = { width: 12, step: 2, signed: true };
/** Of the square root of a sag in `SAG_STEP_M`: short legs sag little, long ones much. */
const SAG: FixedPoint = { width: 6, step: 1, signed: true };
const SAG_STEP_M = 0.8;
const FIX_SIGMA_CODES = 16;
/** Half octaves about 5 m, so that usual fix sigmas (1.25, 2.5, 5, 10, 20 m) are exact. */
const FIX_SIGMA_MIDDLE_M = 5;
const FIX_SIGMA_MIDDLE_CODE = 7;

/** The farthest place from the datum, per axis, that a frame can say. */
export const FRAME_POSITION_MAX_M = Math.min(fixedPointMax(MAP_POSITION), fixedPointMax(PATH));
export const NOTE_END_MAX_S = fixedPointMax(END_TIME);
export const NOTE_DURATION_MAX_S = fixedPointMax(DURATION);

/** One note as it travels: raw and immutable once its origin has issued it. */
export interface Note {
  /** Place of the origin in the fleet list, 0 to 15. */
  readonly originIndex: number;
  /** Counts the origin's notes, 1 to 1023. */
  readonly number: number;
  /** Time of its last fix on the origin's clock. */
  readonly endS: number;
  /** Time from its first fix to its last, 1 to 2047. */
  readonly durationS: number;
  /** Mean over the track of (way made good − way through the water) / duration. */
  readonly currentEastMps: number;
  readonly currentNorthMps: number;
  /** Path: an arc from the first fix to the last, its middle `sagM` to the right of the chord. */
  readonly startEastM: number;
  readonly startNorthM: number;
  readonly endEastM: number;
  readonly endNorthM: number;
  readonly sagM: number;
  /** Its first fix is the last fix of note `number − 1 − skipped`. */
  readonly chained: boolean;
  /** Standard deviation per axis of its fixes. */
  readonly fixSigmaM: number;
  /** That many numbers before it were never issued, 0 to 7. */
  readonly skipped: number;
}

/** What one frame says. */
export interface Frame {
  readonly senderIndex: number;
  /** 0 to 255. */
  readonly sequence: number;
  /** Whole seconds modulo 4096. */
  readonly timeMod4096S: number;
  readonly eastM: number;
  readonly northM: number;
  /** 0 up to 1. */
  readonly phase: number;
  /** Place in AGENT_STATES. */
  readonly stateIndex: number;
  readonly positionUncertain: boolean;
  readonly mapStale: boolean;
  readonly batteryLow: boolean;
  readonly note: Note | null;
  /** Numbers modulo 256, for the origins from `havesFirstOrigin` on; exactly five. */
  readonly haves: readonly number[];
}

/** Why bytes are not a frame. */
export type FrameRefusal = 'length' | 'check' | 'version' | 'content';

export type FrameReading =
  | { readonly ok: true; readonly frame: Frame }
  | { readonly ok: false; readonly reason: FrameRefusal };

/** The origin of the first of a frame's five haves; the others follow in fleet order, wrapping. */
export function havesFirstOrigin(sequence: number, fleetSize: number): number {
  return (HAVES_PER_FRAME * sequence) % fleetSize;
}

/** The code of a fix sigma: the nearest half octave, held to 0.44 to 80 m. */
function fixSigmaCode(fixSigmaM: number): number {
  const octaves = Math.log2(Math.max(fixSigmaM, Number.MIN_VALUE) / FIX_SIGMA_MIDDLE_M);
  return Math.min(FIX_SIGMA_CODES - 1, Math.max(0, FIX_SIGMA_MIDDLE_CODE + Math.round(2 * octaves)));
}

function fixSigmaFromCode(code: number): number {
  return FIX_SIGMA_MIDDLE_M * 2 ** ((code - FIX_SIGMA_MIDDLE_CODE) / 2);
}

function sagFromCode(code: number): number {
  const root = fromCode(SAG, code);
  return SAG_STEP_M * root * Math.abs(root);
}

/** The note as every vehicle, its origin included, will use it: each field on its grid. */
export function roundedNote(note: Note): Note {
  const bytes = new Uint8Array(FRAME_BYTES);
  putNote(bytes, 0, note);
  const read = getNote(bytes, 0);
  assert(read !== null, 'a note that was issued has a duration');
  return read;
}

const NOTE_BITS = 128;

function putNote(bytes: Uint8Array, bitIndex: number, note: Note): void {
  assert(note.number >= 1 && note.number <= NOTE_NUMBER_MAX, 'note numbers run from 1 to 1023');
  assert(note.durationS >= 1, 'a note lasts at least a second');
  let at = bitIndex;
  const put = (width: number, code: number): void => {
    putBits(bytes, at, width, code);
    at += width;
  };
  put(4, note.originIndex);
  put(10, note.number);
  put(END_TIME.width, toCode(END_TIME, note.endS));
  put(DURATION.width, toCode(DURATION, note.durationS));
  put(CURRENT.width, toCode(CURRENT, note.currentEastMps));
  put(CURRENT.width, toCode(CURRENT, note.currentNorthMps));
  put(PATH.width, toCode(PATH, note.startEastM));
  put(PATH.width, toCode(PATH, note.startNorthM));
  put(PATH.width, toCode(PATH, note.endEastM));
  put(PATH.width, toCode(PATH, note.endNorthM));
  put(SAG.width, toCode(SAG, Math.sign(note.sagM) * Math.sqrt(Math.abs(note.sagM) / SAG_STEP_M)));
  put(1, note.chained ? 1 : 0);
  put(4, fixSigmaCode(note.fixSigmaM));
  put(3, note.skipped);
  assert(at === bitIndex + NOTE_BITS, 'a note fills its bits');
}

function getNote(bytes: Uint8Array, bitIndex: number): Note | null {
  let at = bitIndex;
  const get = (width: number): number => {
    const code = getBits(bytes, at, width);
    at += width;
    return code;
  };
  const note: Note = {
    originIndex: get(4),
    number: get(10),
    endS: fromCode(END_TIME, get(END_TIME.width)),
    durationS: fromCode(DURATION, get(DURATION.width)),
    currentEastMps: fromCode(CURRENT, get(CURRENT.width)),
    currentNorthMps: fromCode(CURRENT, get(CURRENT.width)),
    startEastM: fromCode(PATH, get(PATH.width)),
    startNorthM: fromCode(PATH, get(PATH.width)),
    endEastM: fromCode(PATH, get(PATH.width)),
    endNorthM: fromCode(PATH, get(PATH.width)),
    sagM: sagFromCode(get(SAG.width)),
    chained: get(1) === 1,
    fixSigmaM: fixSigmaFromCode(get(4)),
    skipped: get(3),
  };
  return note.durationS === 0 ? null : note;
}

/** Packs a frame into a new array of 32 bytes; positions and times are held to their ranges. */
export function encodeFrame(frame: Frame): Uint8Array {
  assert(frame.haves.length === HAVES_PER_FRAME, 'a frame has five haves');
  const bytes = new Uint8Array(FRAME_BYTES);
  let at = 0;
  const put = (width: number, code: number): void => {
    putBits(bytes, at, width, code);
    at += width;
  };
  put(3, FRAME_VERSION);
  put(4, frame.senderIndex);
  put(8, frame.sequence);
  put(12, frame.timeMod4096S);
  put(MAP_POSITION.width, toCode(MAP_POSITION, frame.eastM));
  put(MAP_POSITION.width, toCode(MAP_POSITION, frame.northM));
  put(12, Math.round(frame.phase * PHASE_CODES) % PHASE_CODES);
  put(3, frame.stateIndex);
  put(1, frame.batteryLow ? 1 : 0);
  put(1, frame.mapStale ? 1 : 0);
  put(1, frame.positionUncertain ? 1 : 0);
  if (frame.note !== null) putNote(bytes, at, frame.note);
  at += NOTE_BITS;
  for (const have of frame.haves) put(8, have);
  put(1, 0);
  put(16, crc16(bytes, FRAME_BYTES - 2));
  assert(at === 8 * FRAME_BYTES, 'a frame fills its bits');
  return bytes;
}

/** Reads 32 bytes; anything else, a wrong check or a field outside its meaning is refused. */
export function decodeFrame(bytes: Uint8Array): FrameReading {
  if (bytes.length !== FRAME_BYTES) return { ok: false, reason: 'length' };
  if (getBits(bytes, 240, 16) !== crc16(bytes, FRAME_BYTES - 2)) return { ok: false, reason: 'check' };
  let at = 0;
  const get = (width: number): number => {
    const code = getBits(bytes, at, width);
    at += width;
    return code;
  };
  if (get(3) !== FRAME_VERSION) return { ok: false, reason: 'version' };
  const senderIndex = get(4);
  const sequence = get(8);
  const timeMod4096S = get(12);
  const eastM = fromCode(MAP_POSITION, get(MAP_POSITION.width));
  const northM = fromCode(MAP_POSITION, get(MAP_POSITION.width));
  const phase = get(12) / PHASE_CODES;
  const stateIndex = get(3);
  const batteryLow = get(1) === 1;
  const mapStale = get(1) === 1;
  const positionUncertain = get(1) === 1;
  const note = getNote(bytes, at);
  at += NOTE_BITS;
  const haves = [get(8), get(8), get(8), get(8), get(8)];
  const spare = get(1);
  if (spare !== 0 || stateIndex >= AGENT_STATES.length) return { ok: false, reason: 'content' };
  if (note !== null && (note.number < 1 || note.endS < note.durationS)) {
    return { ok: false, reason: 'content' };
  }
  const frame: Frame = {
    senderIndex, sequence, timeMod4096S, eastM, northM, phase, stateIndex,
    positionUncertain, mapStale, batteryLow, note, haves,
  };
  return { ok: true, frame };
}

const HEX = '0123456789abcdef';

/** Bytes as lower-case hex, the form in which frames stand in messages and files. */
export function hexFromBytes(bytes: Uint8Array): string {
  let text = '';
  for (const byte of bytes) text += HEX[byte >> 4]! + HEX[byte & 15]!;
  return text;
}

/** Lower-case hex to bytes, or `null` if the text is anything else. */
export function bytesFromHex(text: string): Uint8Array | null {
  if (text.length % 2 !== 0) return null;
  const bytes = new Uint8Array(text.length / 2);
  for (let index = 0; index < bytes.length; index++) {
    const high = HEX.indexOf(text[2 * index]!);
    const low = HEX.indexOf(text[2 * index + 1]!);
    if (high < 0 || low < 0) return null;
    bytes[index] = high * 16 + low;
  }
  return bytes;
}
