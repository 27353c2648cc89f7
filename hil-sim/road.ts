/** The roads of a run: agents in process, or as processes of their own behind a broker. */
import type { Mission } from '../messages/mission.ts';
import { complain } from './complain.ts';
import { pacedAgents } from './run/paced.ts';
import type { Agents, RunResult } from './run/run-trial.ts';
import type { Bus } from './shell/bus.ts';
import { missionsOf } from './trial/missions.ts';
import type { Trial } from './trial/schema.ts';

export interface RoadOptions {
  readonly inProcess?: boolean;
  /** Address of an outside broker. */
  readonly broker?: string;
  /** Simulated seconds per second of the wall clock; absent for lockstep. */
  readonly pace?: number;
  /** Vehicles whose agents are foreign. */
  readonly leave?: readonly string[];
  readonly restart?: boolean;
}

/** What is wrong with the options for a trial, or null. */
export function roadProblem(options: RoadOptions, trial: Trial): string | null {
  const { inProcess = false, broker, leave = [], restart = false } = options;
  const names = trial.fleet.vehicles.map(({ name }) => name);
  if (inProcess && broker !== undefined) return '--broker needs real processes, so it cannot go with --in-process';
  if (inProcess && leave.length > 0) return '--leave needs real processes, so it cannot go with --in-process';
  if (inProcess && restart) return '--restart needs real processes, so it cannot go with --in-process';
  const unknown = leave.find((name) => !names.includes(name));
  if (unknown !== undefined) return `--leave ${unknown}: must be a vehicle of the trial: ${names.join(', ')}`;
  if (broker !== undefined && !/^(mqtt|mqtts|tcp|ws|wss):\/\/./.test(broker)) {
    return `--broker ${broker}: must be a URL like mqtt://192.0.2.7:1883`;
  }
  return null;
}

export interface Road {
  readonly trial: Trial;
  /** Name of the bench in topics. */
  readonly bench: string;
  readonly options: RoadOptions;
}

type Run = (agents: Agents, signal: AbortSignal) => Promise<RunResult>;

/** Runs with agents in process or as processes of their own; they are gone when this returns. */
export async function withAgents(job: Road, run: Run): Promise<RunResult> {
  const missions = missionsOf(job.trial);
  const stop = new AbortController();
  const onSignal = (): void => { stop.abort(); };
  process.once('SIGINT', onSignal).once('SIGTERM', onSignal);
  try {
    if (job.options.inProcess === true) {
      const { inProcessAgents } = await import('./run/in-process.ts');
      return await run(paced(job, inProcessAgents(missions, keepsMemory(job.trial)), stop.signal), stop.signal);
    }
    return await withProcesses(job, missions, run, stop.signal);
  } finally {
    process.removeListener('SIGINT', onSignal).removeListener('SIGTERM', onSignal);
  }
}

function paced<T extends Agents>({ options: { pace }, trial }: Road, agents: T, signal: AbortSignal): T {
  return pace === undefined ? agents : pacedAgents(agents, { pace, tickS: trial.tick, signal });
}

async function withProcesses(
  job: Road, missions: readonly Mission[], run: Run, signal: AbortSignal,
): Promise<RunResult> {
  const { bench, options: { broker, leave = [], restart = false, pace } } = job;
  const [{ startBroker }, { BrokerTrouble, joinBroker }, { AgentTrouble, processAgents }] = await Promise.all([
    import('./shell/broker.ts'), import('./shell/external-broker.ts'), import('./run/processes.ts'),
  ]);
  let bus: Bus | null = null;
  try {
    const vehicles = missions.map(({ vehicle }) => vehicle);
    bus = broker === undefined ? await startBroker() : await joinBroker({ url: broker, bench, vehicles });
    for (const vehicle of leave) complain([`waiting for an agent of ${vehicle} at ${bus.url}, bench ${bench}`]);
    const agents = await processAgents({
      bus, bench, missions, signal, leave, restart, keepsMemory: keepsMemory(job.trial),
      onLine: (vehicle, line) => complain([`${vehicle}: ${line}`]),
      ...(pace === undefined ? {} : { giveUpMs: Infinity }),
    });
    try {
      return await run(paced(job, agents, signal), signal);
    } finally {
      await agents.close();
    }
  } catch (error) {
    if (error instanceof BrokerTrouble) return { ok: false, reason: error.message, vehicle: null, tick: 0, wallS: 0 };
    if (!(error instanceof AgentTrouble)) throw error;
    return { ok: false, reason: error.message, vehicle: error.vehicle, tick: 0, wallS: 0 };
  } finally {
    await bus?.close();
  }
}

/** Whether any scripted reboot starts from kept memory. */
function keepsMemory(trial: Trial): boolean {
  return trial.faults.some((fault) => fault.kind === 'reboot' && fault.memory === 'kept');
}
