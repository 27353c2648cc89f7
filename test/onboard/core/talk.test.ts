import { describe, expect, it } from 'vitest';
import { encodeFrame, hexFromBytes, type Frame } from '../../../messages/frame.ts';
import { frameTime, isTimeToSay, nextSequence, readHeard, startTalk } from '../../../onboard/core/talk.ts';
import { missionFor } from '../../support/mission.ts';

const frame: Frame = {
  senderIndex: 1, sequence: 7, timeMod4096S: 100, eastM: 10, northM: 20, phase: 0.25, stateIndex: 2,
  positionUncertain: false, mapStale: false, batteryLow: false, note: null, haves: [0, 0, 0, 0, 0],
};
const hex = (change: Partial<Frame> = {}): string => hexFromBytes(encodeFrame({ ...frame, ...change }));

describe('readHeard', () => {
  const read = (bytes: string, atS = 102) => readHeard(startTalk(missionFor(0), 0), { at_s: atS, bytes }).fate;

  it('uses a good frame', () => expect(read(hex())).toBe('used'));
  it.each([
    ['is too short', 'abcd', 102, 'length'],
    ['has a flipped bit', hex().replace(/^../, 'ff'), 102, 'check'],
    ['comes from outside the fleet', hex({ senderIndex: 5 }), 102, 'sender'],
    ['claims to come from this vehicle', hex({ senderIndex: 0 }), 102, 'own'],
    ['is half an hour old', hex(), 1901, 'time'],
    ['comes from the future', hex({ timeMod4096S: 200 }), 102, 'time'],
  ])('refuses a frame that %s', (_title, bytes, atS, fate) => {
    expect(read(bytes, atS)).toBe(fate);
  });

  it('refuses a note of an origin outside the fleet', () => {
    const note = {
      originIndex: 9, number: 1, endS: 400, durationS: 300, currentEastMps: 0, currentNorthMps: 0, startEastM: 0,
      startNorthM: 0, endEastM: 0, endNorthM: 0, sagM: 0, chained: false, fixSigmaM: 4, skipped: 0,
    };
    expect(read(hex({ note }))).toBe('sender');
  });

  it('uses a frame once, and the same sequence number again a lap of numbers later', () => {
    const talk = startTalk(missionFor(0), 0);
    const hear = (bytes: string, atS: number) => readHeard(talk, { at_s: atS, bytes }).fate;
    expect([hear(hex(), 102), hear(hex(), 102), hear(hex(), 140)]).toEqual(['used', 'repeat', 'repeat']);
    expect(hear(hex({ timeMod4096S: (100 + 5120) % 4096 }), 5222)).toBe('used');
  });

  it('unwraps the time across 4096 s', () => {
    const talk = startTalk(missionFor(0), 0);
    const reading = readHeard(talk, { at_s: 8195, bytes: hex({ timeMod4096S: 4094 }) });
    expect(reading).toMatchObject({ fate: 'used', frameAtS: 8190 });
  });
});

describe('isTimeToSay', () => {
  it('is true once a round, in the last tick before the own slot (METHODS A8: a round is N slots)', () => {
    const talk = startTalk(missionFor(2), 2);
    const said = Array.from({ length: 60 }, (_, tick) => tick).filter((tick) => isTimeToSay(talk, tick, 1));
    expect(said).toEqual([7, 27, 47]);
  });

  it('follows the onboard clock, however it is offset', () => {
    const talk = startTalk(missionFor(0), 0);
    const said = Array.from({ length: 41 }, (_, tick) => tick - 0.4).filter((atS) => isTimeToSay(talk, atS, 1));
    expect(said).toEqual([-0.4, 19.6, 39.6]);
  });
});

describe('frameTime and nextSequence', () => {
  it('wrap', () => {
    expect([frameTime(4095.6), frameTime(-0.3), frameTime(-2), frameTime(8193)]).toEqual([0, 0, 4094, 1]);
    const talk = startTalk(missionFor(0), 0);
    for (let count = 0; count < 256; count++) expect(nextSequence(talk)).toBe(count);
    expect(nextSequence(talk)).toBe(0);
  });
});
