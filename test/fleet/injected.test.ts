/** What is injected into the links is what agents refuse, by reason, to the last frame, tick by tick. */
import { describe, expect, it } from 'vitest';
import { inProcessAgents } from '../../hil-sim/run/in-process.ts';
import { startSea } from '../../hil-sim/sea/advance.ts';
import { seaPlan } from '../../hil-sim/trial/plan.ts';
import { SMOKE, missionsFor, trialFrom } from '../support/runs.ts';

describe('loss, repeats and garbling', () => {
  it.each([1, 2, 3])('are counted exactly, seed %i', async (seed) => {
    const trial = trialFrom(SMOKE, { seed, sets: ['modem.link={ loss: 20 %, repeat: 15 %, garble: 10 %, delay: 1 s, jitter: 1 s }'] });
    const sea = startSea(seaPlan(trial));
    const agents = inProcessAgents(missionsFor(trial));
    const said = { used: 0, check: 0, repeat: 0, other: 0 };
    const fates = { heard: 0, garbled: 0, refused: 0, lost: 0, other: 0 };
    const copies = new Map<string, number>();
    for (let tick = 0; tick < 900; tick++) {
      const steers = await agents.answer(sea.perceive());
      for (const steer of steers) {
        for (const fate of steer!.heard) said[fate === 'used' || fate === 'check' || fate === 'repeat' ? fate : 'other'] += 1;
      }
      sea.advance(steers);
      for (const { fate, sentS, fromIndex, toIndex } of sea.takeHearings()) {
        fates[fate === 'heard' || fate === 'garbled' || fate === 'refused' || fate === 'lost' ? fate : 'other'] += 1;
        const key = `${sentS}/${fromIndex}/${toIndex}`;
        if (fate === 'heard' || fate === 'refused') copies.set(key, (copies.get(key) ?? 0) + 1);
      }
    }
    const repeats = [...copies.values()].reduce((sum, count) => sum + count - 1, 0);
    expect(fates.garbled).toBeGreaterThan(20);
    expect(repeats).toBeGreaterThan(20);
    expect(said.check).toBe(fates.garbled);
    expect(said.repeat).toBe(repeats);
    expect(said.used).toBe(fates.heard);
    expect(fates.refused).toBe(said.repeat);
    expect(said.other).toBe(0);
  });
});
