import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { AGENT_STATES, type AgentState, type Frame } from '../../../messages/frame.ts';
import { makeLoop, pointAt } from '../../../onboard/core/loop.ts';
import {
  alignPattern, followFleet, movePattern, placePhase, startPattern, turnsPerS,
} from '../../../onboard/core/pattern.ts';
import { startPeers, takeFrame, type Peers } from '../../../onboard/core/peers.ts';
import { choosePlace, freePlace, isTaken, meetingS, type PlaceQuestion } from '../../../onboard/core/places.ts';

const loop = makeLoop({ shape: 'circle', centre: { east_m: 0, north_m: 0 }, radius_m: 600, turn: 'clockwise' });
const SPEED_MPS = 1.2;

interface Spot { readonly eastM: number; readonly northM: number }

function say(peers: Peers, sender: number, said: Partial<Frame> & { readonly state?: AgentState }): void {
  takeFrame(peers, {
    senderIndex: sender, sequence: 0, timeMod4096S: 10, eastM: 0, northM: 0, phase: 0,
    stateIndex: AGENT_STATES.indexOf(said.state ?? 'holding'), positionUncertain: false, mapStale: false,
    batteryLow: false, note: null, haves: [0, 0, 0, 0, 0], ...said,
  }, 10);
}

function evenPattern(count: number): ReturnType<typeof startPattern> {
  const pattern = startPattern(Array.from({ length: count }, (_, k) => k / count), loop.lengthM, SPEED_MPS);
  movePattern(pattern, 10);
  return pattern;
}

function questionOf(selfIndex: number, spots: readonly Spot[]): PlaceQuestion {
  const peers = startPeers(selfIndex, spots.length);
  spots.forEach((spot, index) => { if (index !== selfIndex) say(peers, index, { ...spot, state: 'waiting' }); });
  return {
    loop, pattern: evenPattern(spots.length), peers, self: { ...spots[selfIndex]!, speedMps: 1.6 },
    ownPhase: 0, atS: 10, silenceS: 600,
  };
}

const spots = fc.array(
  fc.record({ eastM: fc.integer({ min: -1500, max: 1500 }), northM: fc.integer({ min: -1500, max: 1500 }) }),
  { minLength: 2, maxLength: 8 },
);

describe('who takes which place', () => {
  it('is settled without a word: every vehicle that heard all finds the same, one place each', () => {
    fc.assert(fc.property(spots, (where) => {
      const places = where.map((_, index) => choosePlace(questionOf(index, where)));
      expect([...places].sort((a, b) => a - b)).toEqual(where.map((_, index) => index));
    }), { numRuns: 60 });
  });

  it('goes by the time in which a vehicle meets a place that moves', () => {
    const question = questionOf(0, [{ eastM: -900, northM: 0 }, { eastM: 900, northM: 0 }]);
    const soonS = meetingS(loop, question.pattern, 1, question.self);
    const point = new Float64Array(2);
    pointAt(loop, placePhase(question.pattern, 1) + turnsPerS(question.pattern) * soonS, point);
    const wayM = Math.sqrt((point[0]! + 900) ** 2 + point[1]! ** 2);
    expect(wayM / 1.6 / soonS).toBeCloseTo(1, 2);
  });
});

describe('two on one place', () => {
  const claim = (self: number, peer: number, peerState: AgentState, holding: boolean): boolean => {
    const question = questionOf(self, Array.from({ length: 5 }, () => ({ eastM: 0, northM: 0 })));
    say(question.peers, peer, { timeMod4096S: 11, state: peerState, phase: placePhase(question.pattern, 3) });
    return isTaken({ ...question, ownPhase: placePhase(question.pattern, 3) }, 3, holding);
  };

  it.each([
    ['a joiner gives way to one that holds', 1, 4, 'holding', false, true],
    ['of two joiners the later in fleet order gives way', 4, 1, 'joining', false, true],
    ['of two joiners the earlier in fleet order stays', 1, 4, 'joining', false, false],
    ['one that holds does not give way to a joiner', 4, 1, 'joining', true, false],
    ['of two that hold side by side the later gives way', 4, 1, 'holding', true, true],
    ['of two that hold side by side the earlier stays', 1, 4, 'holding', true, false],
    ['one that goes home claims nothing', 4, 1, 'homing', false, false],
  ] as const)('%s', (_title, self, peer, state, holding, gives) => {
    expect(claim(self, peer, state, holding)).toBe(gives);
  });

  it('is no such case when a holder only lags: gaps breathe in strong drift', () => {
    const question = questionOf(4, Array.from({ length: 5 }, () => ({ eastM: 0, northM: 0 })));
    say(question.peers, 1, { timeMod4096S: 11, phase: placePhase(question.pattern, 3) + 0.07 });
    expect(isTaken({ ...question, ownPhase: placePhase(question.pattern, 3) - 0.02 }, 3, true)).toBe(false);
  });

  it('ends with the one that gives way going to a free place', () => {
    const question = questionOf(4, Array.from({ length: 5 }, () => ({ eastM: 0, northM: 0 })));
    for (const [peer, place] of [[0, 3], [1, 0], [2, 1], [3, 4]] as const) {
      say(question.peers, peer, { timeMod4096S: 11, phase: placePhase(question.pattern, place) });
    }
    expect(freePlace(question, 3)).toBe(2);
  });
});

describe('the pattern of places', () => {
  it('is laid at once on those that hold, whichever shift of the clock it began with', () => {
    const shifts = fc.double({ min: 0, max: 0.999, noNaN: true });
    fc.assert(fc.property(shifts, fc.integer({ min: 1, max: 4 }), (shift, heard) => {
      const pattern = evenPattern(5);
      const peers = startPeers(4, 5);
      for (let peer = 0; peer < heard; peer++) say(peers, peer, { phase: (shift + peer / 5) % 1 });
      alignPattern(pattern, peers, { atS: 10, silenceS: 600 });
      const off = ((placePhase(pattern, 0) - shift) * 5) % 1;
      expect(Math.min(Math.abs(off), 1 - Math.abs(off))).toBeLessThan(1e-9);
    }));
  });

  it('of uneven places is laid the one way that fits', () => {
    const offsets = [0, 0.1, 0.3, 0.65];
    const pattern = startPattern(offsets, loop.lengthM, SPEED_MPS);
    movePattern(pattern, 10);
    const peers = startPeers(3, 4);
    for (let peer = 0; peer < 3; peer++) say(peers, peer, { phase: (0.42 + offsets[peer]!) % 1 });
    alignPattern(pattern, peers, { atS: 10, silenceS: 600 });
    expect(pattern.phase).toBeCloseTo(0.42, 9);
  });

  it('is drawn toward the mean of what the fleet shows, and not at all by one that goes home', () => {
    const pattern = evenPattern(5);
    const before = pattern.phase;
    const peers = startPeers(0, 5);
    say(peers, 1, { phase: before + 0.2 + 0.01 });
    say(peers, 2, { phase: before + 0.4 + 0.08, state: 'homing' });
    followFleet(pattern, peers, { atS: 10, silenceS: 600, share: 0.5, ownTurns: 0.03 });
    expect(pattern.phase - before).toBeCloseTo(0.5 * (0.01 + 0.03) / 2, 9);
  });
});
