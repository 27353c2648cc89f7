/** A sea that keeps time, against agents that are as late as the test wants. */
import { describe, expect, it } from 'vitest';
import { inProcessAgents } from '../../../hil-sim/run/in-process.ts';
import { pacedAgents, type InterruptibleAgents } from '../../../hil-sim/run/paced.ts';
import type { Sense } from '../../../messages/sense.ts';
import type { Steer } from '../../../messages/steer.ts';
import { SENSE_BARE, STEER_BARE, STEER_FULL } from '../../support/messages.ts';
import { SMOKE, missionsFor, runOf, trialFrom } from '../../support/runs.ts';

const sensesAt = (tick: number): Sense[] => [{ ...SENSE_BARE, tick }, { ...SENSE_BARE, tick }];

/** Two agents; the second answers tick n after `delaysMs[n]`, the first at once. */
function slowAgents(delaysMs: readonly number[]): InterruptibleAgents {
  let settleNow: (standIns: readonly (Steer | null)[]) => void = () => undefined;
  return {
    answer: (senses) => new Promise((resolve) => {
      const tick = senses[0]!.tick;
      const first: Steer = { ...STEER_BARE, tick };
      const timer = setTimeout(() => { resolve([first, { ...STEER_FULL, tick }]); }, delaysMs[tick] ?? 0);
      settleNow = (standIns) => {
        clearTimeout(timer);
        resolve([first, standIns[1] ?? null]);
      };
    }),
    settle: (standIns) => { settleNow(standIns); },
    restart: () => undefined,
    close: () => undefined,
  };
}

async function play(agents: InterruptibleAgents, ticks: number): Promise<{ steers: (readonly (Steer | null)[])[]; tookMs: number }> {
  const steers: (readonly (Steer | null)[])[] = [];
  const startedMs = performance.now();
  for (let tick = 0; tick < ticks; tick++) steers.push(await agents.answer(sensesAt(tick)));
  return { steers, tookMs: performance.now() - startedMs };
}

describe('paced mode', () => {
  it('takes as long as the clock says, however quick the agents are', async () => {
    const { steers, tookMs } = await play(pacedAgents(slowAgents([]), { pace: 20, tickS: 1 }), 8);
    expect(tookMs).toBeGreaterThan(395);
    expect(tookMs).toBeLessThan(800);
    expect(steers.map(([, second]) => second?.tick)).toEqual([0, 1, 2, 3, 4, 5, 6, 7]);
  });

  it('lets the last steer stand in for a late one, saying nothing, under its own tick', async () => {
    const { steers } = await play(pacedAgents(slowAgents([0, 0, 5000, 0]), { pace: 10, tickS: 1 }), 4);
    expect(steers.map(([, second]) => second?.tick)).toEqual([0, 1, 1, 3]);
    expect(steers[2]![1]).toEqual({ ...STEER_FULL, tick: 1, say: null, heard: [], map: null });
    expect(steers[2]![0]).toEqual({ ...STEER_BARE, tick: 2 });
    expect(steers[3]![1]).toEqual({ ...STEER_FULL, tick: 3 });
  });

  it('waits for the first steers, since nothing could stand in for them', async () => {
    const { steers } = await play(pacedAgents(slowAgents([300, 0]), { pace: 20, tickS: 1 }), 2);
    expect(steers.map(([, second]) => second?.tick)).toEqual([0, 1]);
  });

  it('gives agents their span again after the sea itself was held up', async () => {
    const agents = pacedAgents(slowAgents([0, 0, 20, 20, 20]), { pace: 20, tickS: 1 });
    await agents.answer(sensesAt(0));
    await agents.answer(sensesAt(1));
    const untilMs = performance.now() + 400;
    while (performance.now() < untilMs) { /* the sea is busy */ }
    for (const tick of [2, 3, 4]) expect((await agents.answer(sensesAt(tick)))[1]?.tick).toBe(tick);
  });

  it('has in process the digest of a run without it', async () => {
    const trial = trialFrom(SMOKE);
    const plain = await runOf({ trial, ticks: 30, agents: inProcessAgents(missionsFor(trial)) });
    const agents = pacedAgents(inProcessAgents(missionsFor(trial)), { pace: 200, tickS: trial.tick });
    const paced = await runOf({ trial, ticks: 30, agents });
    expect(paced.ok && plain.ok && paced.digest === plain.digest).toBe(true);
    expect(paced.wallS).toBeGreaterThan(0.14);
  });

  it('stops waiting at a signal', async () => {
    const trial = trialFrom(SMOKE);
    const stop = new AbortController();
    const agents = pacedAgents(inProcessAgents(missionsFor(trial)), { pace: 0.1, tickS: 1, signal: stop.signal });
    setTimeout(() => { stop.abort(); }, 50);
    const result = await runOf({ trial, ticks: 100, agents, signal: stop.signal });
    expect(result).toMatchObject({ ok: false, reason: 'stopped by a signal' });
    expect(result.wallS).toBeLessThan(3);
  });
});
