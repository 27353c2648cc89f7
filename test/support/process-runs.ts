/** Runs with agents as processes, for tests: broker, agents, run, and all of it gone afterwards. */
import { readFileSync } from 'node:fs';
import { pacedAgents } from '../../hil-sim/run/paced.ts';
import { processAgents, type ProcessAgents, type ProcessOptions } from '../../hil-sim/run/processes.ts';
import type { RunResult, Watcher } from '../../hil-sim/run/run-trial.ts';
import { startBroker } from '../../hil-sim/shell/broker.ts';
import type { Bus, Qos } from '../../hil-sim/shell/bus.ts';
import type { Trial } from '../../hil-sim/trial/schema.ts';
import { AGENT_COMMAND } from './build.ts';
import { missionsFor, runOf } from './runs.ts';

export interface ProcessRun {
  readonly trial: Trial;
  readonly ticks: number;
  readonly qos?: Qos;
  readonly bus?: Bus;
  readonly pace?: number;
  readonly more?: Partial<ProcessOptions>;
  readonly watchers?: readonly Watcher[];
  /** Called when all agents are ready, before the first tick. */
  readonly onReady?: (agents: ProcessAgents, bus: Bus) => void | Promise<void>;
}

export interface ProcessRunResult {
  readonly result: RunResult;
  readonly refused: Readonly<Record<string, number>>;
  readonly pids: readonly number[];
}

export const BENCH = 'under-test';

/** Runs the trial over the bus given, or over an embedded broker of its own. */
export async function runOverProcesses(run: ProcessRun): Promise<ProcessRunResult> {
  const { trial, ticks, qos = 0, watchers = [] } = run;
  const bus = run.bus ?? await startBroker({ qos });
  try {
    const agents = await processAgents({
      bus, bench: BENCH, missions: missionsFor(trial), qos, agent: AGENT_COMMAND, ...run.more,
    });
    try {
      await run.onReady?.(agents, bus);
      const pids = [...agents.pids().values()];
      const paced = run.pace === undefined ? agents : pacedAgents(agents, { pace: run.pace, tickS: trial.tick });
      const result = await runOf({ trial, ticks, agents: paced, watchers });
      return { result, refused: { ...agents.refused }, pids };
    } finally {
      await agents.close();
    }
  } finally {
    await bus.close();
  }
}

/** Whether a process is there; one that has ended and whose parent has not yet looked is not. */
export function isAlive(pid: number): boolean {
  try {
    return !/\) Z /.test(readFileSync(`/proc/${pid}/stat`, 'utf8'));
  } catch {
    return false;
  }
}

export async function waitUntil(isSo: () => boolean, withinMs: number): Promise<boolean> {
  const untilMs = performance.now() + withinMs;
  while (!isSo() && performance.now() < untilMs) await sleep(20);
  return isSo();
}

export const sleep = (ms: number): Promise<void> => new Promise((resolve) => { setTimeout(resolve, ms); });
