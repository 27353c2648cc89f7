/**
 * Paced mode: the sea keeps time against the wall clock. The steers of a tick are taken when its span is
 * over; for an agent that is late the last steer stands in, saying nothing, under its own tick number, by
 * which the measures count it. The first steers are waited for, since nothing could stand in for them.
 *
 * Should the sea itself fall behind by more than half a tick, its clock is put back by that much: agents
 * always get most of a span to answer.
 */
import type { Sense } from '../../messages/sense.ts';
import type { Steer } from '../../messages/steer.ts';
import type { Agents } from './run-trial.ts';

/** Agents that can be cut short: those of a bus. */
export interface InterruptibleAgents extends Agents {
  /** Settles the tick that is being waited for, if there is one, with these in place of what is missing. */
  settle(standIns: readonly (Steer | null)[]): void;
}

export interface PaceOptions {
  /** Simulated seconds per second of the wall clock. */
  readonly pace: number;
  readonly tickS: number;
  readonly signal?: AbortSignal | undefined;
}

interface Clock {
  readonly spanMs: number;
  baseMs: number;
  baseTick: number;
}

/** The same agents, a tick in its time. */
export function pacedAgents<T extends Agents | InterruptibleAgents>(agents: T, options: PaceOptions): T {
  const clock: Clock = { spanMs: (1000 * options.tickS) / options.pace, baseMs: 0, baseTick: -1 };
  const last: (Steer | null)[] = [];
  return {
    ...agents,
    async answer(senses: readonly (Sense | null)[]) {
      const tick = senses.find((sense) => sense !== null)?.tick;
      if (tick === undefined) {
        await sleepUntil(performance.now() + clock.spanMs, options.signal);
        return senses.map(() => null);
      }
      const untilMs = dueMs(clock, tick);
      const canStandIn = senses.every((sense, index) => sense === null || (last[index] ?? null) !== null);
      const timer = canStandIn && 'settle' in agents
        ? setTimeout(() => { agents.settle(last); }, Math.max(0, untilMs - performance.now()))
        : undefined;
      let steers: readonly (Steer | null)[];
      try {
        steers = await agents.answer(senses);
      } finally {
        clearTimeout(timer);
      }
      await sleepUntil(untilMs, options.signal);
      steers.forEach((steer, index) => {
        if (steer !== null) last[index] = { ...steer, say: null, heard: [], map: null };
        else if (senses[index] === null) last[index] = null;
      });
      return steers;
    },
  };
}

/** When the span of a tick is over. */
function dueMs(clock: Clock, tick: number): number {
  const nowMs = performance.now();
  if (clock.baseTick < 0) {
    clock.baseTick = tick;
    clock.baseMs = nowMs;
  }
  const startMs = clock.baseMs + (tick - clock.baseTick) * clock.spanMs;
  if (nowMs - startMs > clock.spanMs / 2) clock.baseMs += nowMs - startMs;
  return clock.baseMs + (tick - clock.baseTick + 1) * clock.spanMs;
}

/** Waits for a time of performance.now(), or for the signal. */
function sleepUntil(timeMs: number, signal: AbortSignal | undefined): Promise<void> {
  const leftMs = timeMs - performance.now();
  if (leftMs <= 0 || signal?.aborted === true) return Promise.resolve();
  return new Promise((resolve) => {
    const done = (): void => {
      clearTimeout(timer);
      signal?.removeEventListener('abort', done);
      resolve();
    };
    const timer = setTimeout(done, leftMs);
    signal?.addEventListener('abort', done, { once: true });
  });
}
