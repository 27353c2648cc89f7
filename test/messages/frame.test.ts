/**
 * The frame's layout is held twice over: by a slow packer that writes bits as text (an independent
 * reading of the table in `frame.ts`), and by golden bytes. The check bits are CRC-16/IBM-3740.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { crc16 } from '../../messages/crc.ts';
import {
  AGENT_STATES, FRAME_BYTES, FRAME_POSITION_MAX_M, bytesFromHex, decodeFrame, encodeFrame, havesFirstOrigin,
  hexFromBytes, roundedNote, type Frame, type Note,
} from '../../messages/frame.ts';

const whole = (min: number, max: number) => fc.integer({ min, max });

/** Notes that stand on the frame's grid already. */
const gridNote: fc.Arbitrary<Note> = fc.record({
  originIndex: whole(0, 15),
  number: whole(1, 1023),
  endS: whole(2047, 131_071),
  durationS: whole(1, 2047),
  currentEastMps: whole(-2047, 2047).map((code) => code * 0.001),
  currentNorthMps: whole(-2047, 2047).map((code) => code * 0.001),
  startEastM: whole(-2047, 2047).map((code) => code * 2),
  startNorthM: whole(-2047, 2047).map((code) => code * 2),
  endEastM: whole(-2047, 2047).map((code) => code * 2),
  endNorthM: whole(-2047, 2047).map((code) => code * 2),
  sagM: whole(-31, 31).map((code) => 0.8 * code * Math.abs(code)),
  chained: fc.boolean(),
  fixSigmaM: whole(0, 15).map((code) => 5 * 2 ** ((code - 7) / 2)),
  skipped: whole(0, 7),
});

const gridFrame: fc.Arbitrary<Frame> = fc.record({
  senderIndex: whole(0, 15),
  sequence: whole(0, 255),
  timeMod4096S: whole(0, 4095),
  eastM: whole(-4095, 4095),
  northM: whole(-4095, 4095),
  phase: whole(0, 4095).map((code) => code / 4096),
  stateIndex: whole(0, AGENT_STATES.length - 1),
  positionUncertain: fc.boolean(),
  mapStale: fc.boolean(),
  batteryLow: fc.boolean(),
  note: fc.option(gridNote, { nil: null }),
  haves: fc.array(whole(0, 255), { minLength: 5, maxLength: 5 }),
});

const bits = (width: number, code: number): string =>
  (code < 0 ? code + 2 ** width : code).toString(2).padStart(width, '0');

/** The table in the head of `frame.ts`, once more, as text of noughts and ones. */
function slowFrame(frame: Frame): string {
  const note = frame.note;
  const noteBits = note === null ? '0'.repeat(128) : [
    bits(4, note.originIndex), bits(10, note.number), bits(17, note.endS), bits(11, note.durationS),
    bits(12, Math.round(note.currentEastMps * 1000)), bits(12, Math.round(note.currentNorthMps * 1000)),
    bits(12, note.startEastM / 2), bits(12, note.startNorthM / 2), bits(12, note.endEastM / 2),
    bits(12, note.endNorthM / 2), bits(6, Math.sign(note.sagM) * Math.round(Math.sqrt(Math.abs(note.sagM) / 0.8))), note.chained ? '1' : '0',
    bits(4, Math.round(Math.log2(note.fixSigmaM / 5) * 2) + 7), bits(3, note.skipped),
  ].join('');
  const body = [
    bits(3, 1), bits(4, frame.senderIndex), bits(8, frame.sequence), bits(12, frame.timeMod4096S),
    bits(13, frame.eastM), bits(13, frame.northM), bits(12, frame.phase * 4096), bits(3, frame.stateIndex),
    frame.batteryLow ? '1' : '0', frame.mapStale ? '1' : '0', frame.positionUncertain ? '1' : '0',
    noteBits, ...frame.haves.map((have) => bits(8, have)), '0',
  ].join('');
  const bytes = Uint8Array.from({ length: 30 }, (_, index) => parseInt(body.slice(8 * index, 8 * index + 8), 2));
  return hexFromBytes(bytes) + crc16(bytes).toString(16).padStart(4, '0');
}

const GOLDEN_FRAME: Frame = {
  senderIndex: 2, sequence: 77, timeMod4096S: 1234, eastM: -583, northM: 140, phase: 3000 / 4096, stateIndex: 2,
  positionUncertain: false, mapStale: true, batteryLow: false,
  note: {
    originIndex: 4, number: 19, endS: 5701, durationS: 300, currentEastMps: -0.123, currentNorthMps: 0.256,
    startEastM: -400, startNorthM: 446, endEastM: -584, endNorthM: 136, sagM: -20, chained: true,
    fixSigmaM: 5, skipped: 0,
  },
  haves: [18, 19, 19, 17, 19],
};

describe('encodeFrame and decodeFrame', () => {
  it('agree with a slow packer for every field', () => {
    fc.assert(fc.property(gridFrame, (frame) => {
      expect(hexFromBytes(encodeFrame(frame))).toBe(slowFrame(frame));
    }));
  });

  it('give back every frame that stands on the grid', () => {
    fc.assert(fc.property(gridFrame, (frame) => {
      expect(decodeFrame(encodeFrame(frame))).toEqual({ ok: true, frame });
    }));
  });

  it('keep the golden bytes', () => {
    expect(hexFromBytes(encodeFrame(GOLDEN_FRAME))).toBe(
      '249a9a5db90465dc2480985914967c288079c06ff6e0227770242626222642c6',
    );
  });

  it('keep the golden bytes of a frame without a note', () => {
    expect(hexFromBytes(encodeFrame({ ...GOLDEN_FRAME, note: null, haves: [0, 0, 0, 0, 0] }))).toBe(
      '249a9a5db90465dc24000000000000000000000000000000000000000000f3e1',
    );
  });

  it('refuse any frame with one to three flipped bits', () => {
    const threeBits = fc.uniqueArray(whole(0, 8 * FRAME_BYTES - 1), { minLength: 1, maxLength: 3 });
    fc.assert(fc.property(gridFrame, threeBits, (frame, places) => {
      const bytes = encodeFrame(frame);
      for (const at of places) bytes[at >> 3]! ^= 0x80 >> (at & 7);
      expect(decodeFrame(bytes)).toEqual({ ok: false, reason: 'check' });
    }));
  });

  it('never throw, whatever the bytes', () => {
    fc.assert(fc.property(fc.uint8Array({ maxLength: 64 }), (bytes) => {
      expect(typeof decodeFrame(bytes).ok).toBe('boolean');
    }));
  });

  it('refuse a wrong length, a wrong version and content without meaning, by name', () => {
    const withCheck = (change: (bytes: Uint8Array) => void): Uint8Array => {
      const bytes = encodeFrame(GOLDEN_FRAME);
      change(bytes);
      const check = crc16(bytes, 30);
      bytes[30] = check >> 8;
      bytes[31] = check & 255;
      return bytes;
    };
    expect(decodeFrame(new Uint8Array(31))).toEqual({ ok: false, reason: 'length' });
    expect(decodeFrame(withCheck((bytes) => { bytes[0]! ^= 0xe0; }))).toEqual({ ok: false, reason: 'version' });
    expect(decodeFrame(withCheck((bytes) => { bytes[29]! |= 1; }))).toEqual({ ok: false, reason: 'content' });
  });

  it('hold positions beyond the range to its ends', () => {
    const far = decodeFrame(encodeFrame({ ...GOLDEN_FRAME, eastM: 9e5, northM: -9e5 }));
    expect(far.ok && [far.frame.eastM, far.frame.northM]).toEqual([4095, -4095]);
    expect(FRAME_POSITION_MAX_M).toBe(4094);
  });

  it('round phases to the nearest 4096th and wrap at the top', () => {
    const read = decodeFrame(encodeFrame({ ...GOLDEN_FRAME, phase: 0.99999 }));
    expect(read.ok && read.frame.phase).toBe(0);
  });
});

describe('roundedNote', () => {
  it('moves no field by more than half a step, and moves a rounded note not at all', () => {
    const anyNote = gridNote.chain((note) => fc.record({
      east: fc.double({ min: -2, max: 2, noNaN: true }), path: fc.double({ min: -4000, max: 4000, noNaN: true }),
    }).map(({ east, path }) => ({ ...note, currentEastMps: east, startNorthM: path })));
    fc.assert(fc.property(anyNote, (note) => {
      const rounded = roundedNote(note);
      expect(Math.abs(rounded.currentEastMps - note.currentEastMps)).toBeLessThanOrEqual(0.0005 + 1e-12);
      expect(Math.abs(rounded.startNorthM - note.startNorthM)).toBeLessThanOrEqual(1 + 1e-9);
      expect(roundedNote(rounded)).toEqual(rounded);
    }));
  });
});

describe('havesFirstOrigin', () => {
  it.each([1, 3, 5, 6, 9, 10, 15, 16])('gives every origin of %i its turn within sixteen frames', (fleetSize) => {
    const seen = new Set<number>();
    for (let sequence = 0; sequence < 16; sequence++) {
      for (let offset = 0; offset < 5; offset++) {
        seen.add((havesFirstOrigin(sequence, fleetSize) + offset) % fleetSize);
      }
    }
    expect(seen.size).toBe(fleetSize);
  });
});

describe('hex', () => {
  it('goes there and back, and refuses what is not lower-case hex', () => {
    fc.assert(fc.property(fc.uint8Array({ maxLength: 40 }), (bytes) => {
      expect(bytesFromHex(hexFromBytes(bytes))).toEqual(bytes);
    }));
    expect([bytesFromHex('abc'), bytesFromHex('AB'), bytesFromHex('g0')]).toEqual([null, null, null]);
  });
});
