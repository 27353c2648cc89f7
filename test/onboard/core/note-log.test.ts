/** The note log against an obvious model: a list that is sorted anew each time. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Note } from '../../../messages/frame.ts';
import {
  addNote, heldUpTo, newestNumber, noteAt, noteByNumber, noteCount, startNoteLog,
} from '../../../onboard/core/note-log.ts';
import { someNotes } from '../../support/estimating.ts';

const [PATTERN] = someNotes(1, 1);

const noteOf = (originIndex: number, number: number, endS: number, skipped = 0): Note =>
  ({ ...PATTERN!, originIndex, number, endS, skipped });

/** Per origin the numbers 1 … n with rising ends, some numbers skipped as an agent would after a restart. */
const issued: fc.Arbitrary<Note[]> = fc
  .array(fc.array(fc.record({ afterS: fc.integer({ min: 1, max: 900 }), skipped: fc.constantFrom(0, 0, 0, 0, 2, 7) }), { maxLength: 12 }), {
    minLength: 3, maxLength: 3,
  })
  .map((origins) => origins.flatMap((steps, originIndex) => {
    let number = 0;
    let endS = 0;
    return steps.map(({ afterS, skipped }) => {
      number += 1 + skipped;
      endS += afterS;
      return noteOf(originIndex, number, endS, skipped);
    });
  }));

const inAnyOrder = issued.chain((notes) => fc.tuple(
  fc.shuffledSubarray(notes, { minLength: 0, maxLength: notes.length }),
  fc.shuffledSubarray(notes),
));

describe('the note log', () => {
  it('holds each note once, in canonical order, whatever order they came in', () => {
    fc.assert(fc.property(inAnyOrder, ([notes, again]) => {
      const log = startNoteLog(3);
      for (const note of notes) expect(addNote(log, note)).toBeGreaterThanOrEqual(0);
      for (const note of again.filter((one) => notes.includes(one))) expect(addNote(log, note)).toBe(-1);
      const sorted = notes.slice().sort((a, b) => a.endS - b.endS || a.originIndex - b.originIndex || a.number - b.number);
      expect(noteCount(log)).toBe(notes.length);
      expect(sorted.map((_note, place) => noteAt(log, place))).toEqual(sorted);
      for (const note of notes) expect(noteByNumber(log, note.originIndex, note.number)).toEqual(note);
    }));
  });

  it('answers the place at which a note went in', () => {
    const log = startNoteLog(3);
    expect([noteOf(0, 1, 300), noteOf(1, 1, 200), noteOf(2, 1, 300), noteOf(0, 2, 250)].map((note) => addNote(log, note)))
      .toEqual([0, 0, 2, 1]);
  });

  it('knows up to where nothing is missing: every number below is held or was declared skipped', () => {
    fc.assert(fc.property(inAnyOrder, ([notes]) => {
      const log = startNoteLog(3);
      for (const note of notes) addNote(log, note);
      for (let origin = 0; origin < 3; origin++) {
        const own = notes.filter(({ originIndex }) => originIndex === origin);
        const known = new Set(own.flatMap(({ number, skipped }) => Array.from({ length: skipped + 1 }, (_, back) => number - back)));
        let mark = 0;
        while (known.has(mark + 1)) mark += 1;
        expect(heldUpTo(log, origin)).toBe(mark);
        expect(newestNumber(log, origin)).toBe(Math.max(0, ...own.map(({ number }) => number)));
      }
    }));
  });

  it('does not take a number that was declared skipped', () => {
    const log = startNoteLog(1);
    addNote(log, noteOf(0, 9, 3000, 7));
    expect(addNote(log, noteOf(0, 5, 1500))).toBe(-1);
    expect(noteByNumber(log, 0, 5)).toBeNull();
    expect(addNote(log, noteOf(0, 1, 300))).toBe(0);
  });

  it('has room for every number of sixteen vehicles', () => {
    const log = startNoteLog(16);
    for (let number = 1; number <= 1023; number++) {
      for (let origin = 0; origin < 16; origin++) addNote(log, noteOf(origin, number, 120 * number));
    }
    expect(noteCount(log)).toBe(16 * 1023);
    expect(noteAt(log, 16 * 1023 - 1)).toEqual(noteOf(15, 1023, 120 * 1023));
  });
});
