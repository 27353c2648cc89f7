/** Anti-entropy over lossy frames: what could be heard is not lost, nothing is counted twice, the lost catch up. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { decodeFrame, encodeFrame, roundedNote, type Frame, type Note } from '../../../messages/frame.ts';
import { addNote, heldUpTo, noteByNumber, noteCount, startNoteLog, type NoteLog } from '../../../onboard/core/note-log.ts';
import { chooseNote, hearHaves, ownHaves, ownNumberHeard, startNoteSharing, type NoteSharing } from '../../../onboard/core/share-notes.ts';
import { randomFrom } from '../../support/estimating.ts';

const ROUND_S = 20;

interface Vehicle {
  log: NoteLog;
  sharing: NoteSharing;
  sequence: number;
  issued: number;
}

const noteOf = (originIndex: number, number: number, endS: number, skipped = 0): Note => roundedNote({
  originIndex, number, endS, durationS: 300, currentEastMps: 0.01 * number, currentNorthMps: 0, startEastM: 0, startNorthM: 0,
  endEastM: 100, endNorthM: 100, sagM: 0, chained: number > 1, fixSigmaM: 5, skipped,
});

/** A fleet that only talks: each round every vehicle says one frame, which each other hears or not. */
class TalkingFleet {
  readonly vehicles: Vehicle[];
  private round = 0;
  constructor(readonly size: number) {
    this.vehicles = Array.from({ length: size }, (_, index) => this.fresh(index));
  }
  fresh(index: number): Vehicle {
    return { log: startNoteLog(this.size), sharing: startNoteSharing(index, this.size, 300), sequence: 0, issued: 0 };
  }
  issue(index: number, skipped = 0): void {
    const vehicle = this.vehicles[index]!;
    vehicle.issued = Math.max(vehicle.issued, heldUpTo(vehicle.log, index)) + 1 + skipped;
    addNote(vehicle.log, noteOf(index, vehicle.issued, 300 + this.round * ROUND_S + index, skipped));
  }
  talk(hears: (from: number, to: number) => boolean): void {
    this.round += 1;
    this.vehicles.forEach((speaker, from) => {
      const frame: Frame = {
        senderIndex: from, sequence: speaker.sequence, timeMod4096S: 0, eastM: 0, northM: 0, phase: 0, stateIndex: 2,
        positionUncertain: false, mapStale: false, batteryLow: false,
        note: chooseNote(speaker.sharing, speaker.log), haves: ownHaves(speaker.sharing, speaker.log, speaker.sequence),
      };
      speaker.sequence = (speaker.sequence + 1) % 256;
      const reading = decodeFrame(encodeFrame(frame));
      if (!reading.ok) throw new Error(reading.reason);
      this.vehicles.forEach((hearer, to) => {
        if (to === from || !hears(from, to)) return;
        hearHaves(hearer.sharing, hearer.log, { frame: reading.frame, frameAtS: this.round * ROUND_S + from });
        if (reading.frame.note !== null) addNote(hearer.log, reading.frame.note);
      });
    });
  }
  counts(): number[] {
    return this.vehicles.map(({ log }) => noteCount(log));
  }
}

describe('sharing notes', () => {
  it('brings every note to everybody within bounded rounds after the loss ends, whatever it was', () => {
    const arguments_ = fc.record({ size: fc.integer({ min: 2, max: 9 }), loss: fc.constantFrom(0, 0.3, 0.6, 0.9), seed: fc.integer({ min: 0, max: 1e6 }) });
    fc.assert(fc.property(arguments_, ({ size, loss, seed }) => {
      const fleet = new TalkingFleet(size);
      const random = randomFrom(seed);
      for (let round = 0; round < 150; round++) {
        if (round % 15 === 0) fleet.vehicles.forEach((_vehicle, index) => { fleet.issue(index); });
        fleet.talk(() => random() >= loss);
      }
      for (let round = 0; round < 30 * size; round++) fleet.talk(() => true);
      expect(fleet.counts()).toEqual(fleet.vehicles.map(() => 10 * size));
    }), { numRuns: 25 });
  });

  it('relays: a vehicle that never hears the origin gets its notes from the others', () => {
    const fleet = new TalkingFleet(4);
    for (let round = 0; round < 100; round++) {
      if (round % 15 === 0) fleet.issue(0);
      fleet.talk((from, to) => !(from === 0 && to === 3));
    }
    expect(fleet.counts()[3]).toBe(7);
  });

  it('serves a vehicle that lost its memory, and lets it go on numbering beyond what anyone has heard', () => {
    const fleet = new TalkingFleet(3);
    for (let round = 0; round < 200; round++) {
      if (round % 15 === 0) fleet.vehicles.forEach((_vehicle, index) => { fleet.issue(index); });
      fleet.talk(() => true);
    }
    const before = fleet.counts()[0]!;
    const lastNumber = fleet.vehicles[1]!.issued;
    fleet.vehicles[1] = fleet.fresh(1);
    fleet.talk(() => true);
    expect(ownNumberHeard(fleet.vehicles[1].sharing)).toBe(lastNumber);
    for (let round = 0; round < 60; round++) fleet.talk(() => true);
    expect(fleet.counts()).toEqual([before, before, before]);
    fleet.issue(1, 7);
    for (let round = 0; round < 10; round++) fleet.talk(() => true);
    expect(fleet.vehicles.map(({ log }) => heldUpTo(log, 1))).toEqual([lastNumber + 8, lastNumber + 8, lastNumber + 8]);
  });

  it('says a new note at once, and a wanted old one rather than nothing', () => {
    const log = startNoteLog(2);
    const sharing = startNoteSharing(0, 2, 300);
    for (let number = 1; number <= 3; number++) addNote(log, noteOf(0, number, 300 * number));
    const said = Array.from({ length: 4 }, () => chooseNote(sharing, log)?.number);
    expect(said).toEqual([1, 2, 3, 1]);
    addNote(log, noteOf(0, 4, 1200));
    expect(chooseNote(sharing, log)?.number).toBe(4);
  });

  it('says nothing that nobody wants', () => {
    const log = startNoteLog(2);
    const sharing = startNoteSharing(0, 2, 300);
    addNote(log, noteOf(0, 1, 300));
    const frame = { senderIndex: 1, sequence: 0, haves: [1, 0, 0, 0, 0], note: null } as unknown as Frame;
    hearHaves(sharing, log, { frame, frameAtS: 10 });
    expect(chooseNote(sharing, log)).toBeNull();
    hearHaves(sharing, log, { frame: { ...frame, haves: [0, 0, 0, 0, 0] }, frameAtS: 5 });
    expect(chooseNote(sharing, log)).toBeNull();
  });
});

describe('the note log', () => {
  it('keeps canonical order and counts once, and declared holes hold no mark back', () => {
    const log = startNoteLog(2);
    expect([addNote(log, noteOf(0, 2, 600)), addNote(log, noteOf(0, 1, 300)), addNote(log, noteOf(0, 2, 600))]).toEqual([0, 0, -1]);
    expect([heldUpTo(log, 0), noteCount(log)]).toEqual([2, 2]);
    addNote(log, noteOf(0, 10, 3000, 7));
    expect(heldUpTo(log, 0)).toBe(10);
    expect(addNote(log, noteOf(0, 5, 1500))).toBe(-1);
    expect(noteByNumber(log, 0, 10)?.endS).toBe(3000);
  });
});
