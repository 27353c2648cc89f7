import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Frame } from '../../../messages/frame.ts';
import { isHeard, peerPhase, peerState, startPeers, takeFrame } from '../../../onboard/core/peers.ts';

function frameAt(timeS: number, change: Partial<Frame> = {}): Frame {
  return {
    senderIndex: 2, sequence: 1, timeMod4096S: timeS % 4096, eastM: timeS, northM: -timeS, phase: (timeS % 100) / 100,
    stateIndex: 2, positionUncertain: false, mapStale: false, batteryLow: false, note: null, haves: [0, 0, 0, 0, 0],
    ...change,
  };
}

describe('what is known of peers', () => {
  it('is nothing until one is heard, and nothing after a long silence', () => {
    const peers = startPeers(0, 5);
    expect(isHeard(peers, 2, { atS: 0, silenceS: 600 })).toBe(false);
    takeFrame(peers, frameAt(100), 104);
    expect(isHeard(peers, 2, { atS: 700, silenceS: 600 })).toBe(true);
    expect(isHeard(peers, 2, { atS: 701, silenceS: 600 })).toBe(false);
    expect(peerState(peers, 2)).toBe('holding');
  });

  it('does not depend on the order or repetition of frames', () => {
    const times = fc.uniqueArray(fc.integer({ min: 1, max: 1800 }), { minLength: 1, maxLength: 8 });
    fc.assert(fc.property(times, fc.array(fc.nat(7), { maxLength: 20 }), (sent, picks) => {
      const inOrder = startPeers(0, 5);
      const jumbled = startPeers(0, 5);
      const sorted = [...sent].sort((a, b) => a - b);
      for (const timeS of sorted) takeFrame(inOrder, frameAt(timeS), 1900);
      for (const pick of picks) takeFrame(jumbled, frameAt(sent[pick % sent.length]!), 1900);
      for (const timeS of sent) takeFrame(jumbled, frameAt(timeS), 1900);
      for (const key of ['atS', 'phase', 'eastM', 'northM', 'stateIndex'] as const) {
        expect([...jumbled[key]]).toEqual([...inOrder[key]]);
      }
    }));
  });

  it('has frame times unwrapped near the time of hearing, for days', () => {
    const times = fc.integer({ min: 4096, max: 300_000 });
    fc.assert(fc.property(times, fc.integer({ min: -3, max: 1500 }), (sentS, lateS) => {
      const peers = startPeers(0, 5);
      takeFrame(peers, frameAt(sentS), sentS + lateS);
      expect(peers.atS[2]).toBe(sentS);
    }));
  });

  it('moves on through silence with the common speed', () => {
    const peers = startPeers(0, 5);
    takeFrame(peers, frameAt(100, { phase: 0.9 }), 104);
    expect(peerPhase(peers, 2, 300, 0.001)).toBeCloseTo(0.1, 12);
  });

  it('never takes an echo of the own frame for a peer', () => {
    const peers = startPeers(2, 5);
    takeFrame(peers, frameAt(100), 104);
    expect(peers.news).toBe(0);
  });
});
