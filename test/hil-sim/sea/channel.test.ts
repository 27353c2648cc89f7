/** Burst loss by Gilbert and Elliott: arithmetic of METHODS A7 (L = .2, b = 4: r = .25, p = .0625). */
import { describe, expect, it } from 'vitest';
import { garble, nextFate, startLinks, type LinkFate } from '../../../hil-sim/sea/channel.ts';
import { startDraw } from '../../../hil-sim/sea/draw.ts';
import type { LinkPlan } from '../../../hil-sim/sea/plan.ts';

const CLEAN: LinkPlan = { loss: 0, burst: 1, delayS: 0, jitterS: 0, repeat: 0, garble: 0 };

function fates(change: Partial<LinkPlan>, count: number, seed = 3): LinkFate[] {
  const links = startLinks(1);
  const of = { draw: startDraw(seed), link: { ...CLEAN, ...change }, pair: 0, entity: 18, scratch: new Float64Array(2) };
  return Array.from({ length: count }, () => {
    const fate = { lost: false, garbled: false, delayS: 0, repeatAfterS: -1 };
    nextFate(links, of, fate);
    return fate;
  });
}

const share = (list: readonly boolean[]): number => list.filter(Boolean).length / list.length;

describe('nextFate', () => {
  it('loses the stated share in runs of the stated length, and forgets as published', () => {
    const lost = fates({ loss: 0.2, burst: 4 }, 200_000).map((fate) => fate.lost);
    expect(share(lost)).toBeCloseTo(0.2, 2);
    const runs = lost.filter((isLost, at) => isLost && !(lost[at - 1] ?? false)).length;
    expect(lost.filter(Boolean).length / runs).toBeCloseTo(4, 1);
    for (const [after, expected] of [[1, 0.75], [2, 0.578125], [4, 0.378723], [8, 0.239927]] as const) {
      const pairs = lost.slice(0, -after).flatMap((isLost, at) => (isLost ? [lost[at + after]!] : []));
      expect(Math.abs(share(pairs) - expected)).toBeLessThan(0.015);
    }
  });

  it('loses independently with a burst of one', () => {
    const lost = fates({ loss: 0.3 }, 100_000).map((fate) => fate.lost);
    expect(share(lost)).toBeCloseTo(0.3, 2);
    const pairs = lost.slice(0, -1).flatMap((isLost, at) => (isLost ? [lost[at + 1]!] : []));
    expect(Math.abs(share(pairs) - 0.3)).toBeLessThan(0.01);
  });

  it('keeps the share where share and run cannot both be had', () => {
    expect(Math.abs(share(fates({ loss: 0.9, burst: 2 }, 100_000).map((fate) => fate.lost)) - 0.9)).toBeLessThan(0.01);
  });

  it('loses nothing at 0 % and everything at 100 %', () => {
    expect(share(fates({ loss: 0, burst: 5 }, 1000).map((fate) => fate.lost))).toBe(0);
    expect(share(fates({ loss: 1, burst: 5 }, 1000).map((fate) => fate.lost))).toBe(1);
  });

  it('repeats and garbles the stated shares, and never delays below zero', () => {
    const list = fates({ repeat: 0.1, garble: 0.05, delayS: 1, jitterS: 2 }, 50_000);
    expect(share(list.map((fate) => fate.repeatAfterS >= 0))).toBeCloseTo(0.1, 2);
    expect(share(list.map((fate) => fate.garbled))).toBeCloseTo(0.05, 2);
    expect(Math.min(...list.map((fate) => fate.delayS))).toBe(0);
  });
});

describe('garble', () => {
  it('flips one to three bits, different ones, anywhere in the frame', () => {
    const clean = '00'.repeat(32);
    const seen = new Set<number>();
    for (let count = 0; count < 2000; count++) {
      const digits = garble(startDraw(4), { entity: 5, count }, clean);
      const flipped = [...digits].flatMap((digit, at) => [8, 4, 2, 1].flatMap((bit, place) =>
        ((parseInt(digit, 16) & bit) !== 0 ? [4 * at + place] : [])));
      expect(flipped.length).toBeGreaterThanOrEqual(1);
      expect(flipped.length).toBeLessThanOrEqual(3);
      for (const bit of flipped) seen.add(bit);
    }
    expect(seen.size).toBe(256);
  });
});
