/**
 * The one loop of a trial, whoever answers: the sea perceives, the agents answer, the watchers see the
 * tick, the sea moves on. In process the agents answer at once and nothing waits; over MQTT they answer
 * when they do.
 */
import type { Sense } from '../../messages/sense.ts';
import type { Steer } from '../../messages/steer.ts';
import type { Sea } from '../sea/sea.ts';
import { startDigest } from './digest.ts';
import type { TickRecord } from './record.ts';

export interface Watcher {
  take(record: TickRecord): void;
}

/** Those who answer senses, as processes or in process. */
export interface Agents {
  /** Steers in fleet order, null where the sense is. */
  answer(senses: readonly (Sense | null)[]): readonly (Steer | null)[] | Promise<readonly (Steer | null)[]>;
  /** A scripted reboot: ends the agent (`down`), or starts it anew (`up`) from the memory that it keeps. */
  restart(index: number, phase: 'down' | 'up', memory: 'lost' | 'kept'): void | Promise<void>;
  /** Lets go of what the agents hold; called once, however the run ended. */
  close(): void | Promise<void>;
}

/** Why a run could not go on: the bench failed, not the trial. */
export class RunFailure extends Error {
  override readonly name = 'RunFailure';
  constructor(readonly reason: string, readonly tick: number, readonly vehicle: string | null = null) {
    super(reason);
  }
}

export interface RunOptions {
  readonly sea: Sea;
  readonly agents: Agents;
  readonly ticks: number;
  readonly tickS: number;
  readonly watchers: readonly Watcher[];
  readonly onProgress?: ((tick: number, ticks: number) => void) | undefined;
  readonly signal?: AbortSignal | undefined;
}

export type RunResult =
  | { readonly ok: true; readonly ticks: number; readonly digest: string; readonly wallS: number }
  | {
      readonly ok: false; readonly reason: string; readonly vehicle: string | null; readonly tick: number;
      readonly wallS: number;
    };

/** Ticks between two breaths of the event loop when nobody has to be waited for. */
const BREATH_TICKS = 512;
/** Wall time between two words on progress where agents are waited for. */
const PROGRESS_MS = 500;

export async function runTrial(options: RunOptions): Promise<RunResult> {
  const { sea, agents, ticks, tickS, watchers } = options;
  const digest = startDigest();
  const startedMs = performance.now();
  let toldMs = startedMs;
  const wallS = (): number => (performance.now() - startedMs) / 1000;
  try {
    while (sea.tick < ticks) {
      const { tick } = sea;
      for (const { index, phase, memory } of sea.reboots()) await agents.restart(index, phase, memory);
      const senses = sea.perceive();
      const answer = agents.answer(senses);
      const steers = answer instanceof Promise ? await answer : answer;
      digest.take(senses, steers);
      const record: TickRecord = {
        tick, timeS: tick * tickS, truth: sea.truth, senses, steers, changes: sea.changes(),
        hearings: sea.takeHearings(),
      };
      for (const watcher of watchers) watcher.take(record);
      sea.advance(steers);
      if (tick % BREATH_TICKS === 0 || performance.now() - toldMs > PROGRESS_MS) {
        toldMs = performance.now();
        options.onProgress?.(tick, ticks);
        await new Promise((resolve) => { setImmediate(resolve); });
      }
      if (options.signal?.aborted === true) throw new RunFailure('stopped by a signal', tick);
    }
  } catch (error) {
    const failure = error instanceof RunFailure
      ? error
      : new RunFailure(error instanceof Error ? error.stack ?? error.message : String(error), sea.tick);
    return { ok: false, reason: failure.reason, vehicle: failure.vehicle, tick: failure.tick, wallS: wallS() };
  }
  return { ok: true, ticks, digest: digest.hex(), wallS: wallS() };
}
