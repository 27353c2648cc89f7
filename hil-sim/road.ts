/** The roads of a run: agents in process, or as processes of their own behind a broker. */
import type { Mission } from '../messages/mission.ts';
import { complain } from './complain.ts';
import type { Agents, RunResult } from './run/run-trial.ts';
import { missionsOf } from './trial/missions.ts';
import type { Trial } from './trial/schema.ts';

export interface RoadOptions {
  readonly inProcess?: boolean;
}

export interface Road {
  readonly trial: Trial;
  /** Name of the bench in topics. */
  readonly bench: string;
  readonly options: RoadOptions;
}

/** Runs with agents in process or as processes of their own; they are gone when this returns. */
export async function withAgents(
  job: Road, run: (agents: Agents, signal: AbortSignal) => Promise<RunResult>,
): Promise<RunResult> {
  const missions = missionsOf(job.trial);
  const stop = new AbortController();
  const onSignal = (): void => { stop.abort(); };
  process.once('SIGINT', onSignal).once('SIGTERM', onSignal);
  try {
    if (job.options.inProcess === true) {
      const { inProcessAgents } = await import('./run/in-process.ts');
      return await run(inProcessAgents(missions, keepsMemory(job.trial)), stop.signal);
    }
    return await withProcesses(job, missions, (agents) => run(agents, stop.signal), stop.signal);
  } finally {
    process.removeListener('SIGINT', onSignal).removeListener('SIGTERM', onSignal);
  }
}

async function withProcesses(
  job: Road, missions: readonly Mission[], run: (agents: Agents) => Promise<RunResult>, signal: AbortSignal,
): Promise<RunResult> {
  const [{ startBroker }, { AgentTrouble, processAgents }] = await Promise.all([
    import('./shell/broker.ts'), import('./run/processes.ts'),
  ]);
  const bus = await startBroker();
  try {
    const agents = await processAgents({
      bus, bench: job.bench, missions, signal, onLine: (vehicle, line) => complain([`${vehicle}: ${line}`]),
    });
    try {
      return await run(agents);
    } finally {
      await agents.close();
    }
  } catch (error) {
    if (!(error instanceof AgentTrouble)) throw error;
    return { ok: false, reason: error.message, vehicle: error.vehicle, tick: 0, wallS: 0 };
  } finally {
    await bus.close();
  }
}

/** Whether any scripted reboot starts from kept memory. */
function keepsMemory(trial: Trial): boolean {
  return trial.faults.some((fault) => fault.kind === 'reboot' && fault.memory === 'kept');
}
