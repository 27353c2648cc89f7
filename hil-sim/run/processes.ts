/**
 * Agents as processes of their own, one per vehicle, joined by a broker. They are started from compiled
 * code, waited for, watched, and ended by their ids on every way out. Their standard input is tied to
 * this process: should it die in any way, they end too.
 */
import { spawn, type ChildProcess } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import { writeMessage } from '../../messages/codec.ts';
import type { Mission } from '../../messages/mission.ts';
import type { SeaTick } from '../../messages/sea.ts';
import { seaTopic, vehicleTopic } from '../../messages/topics.ts';
import type { Bus, Qos } from '../shell/bus.ts';
import { lockstepAgents, type LockstepAgents } from '../shell/lockstep.ts';
import { AgentTrouble, watchStatuses, type Readiness } from '../shell/readiness.ts';

export { AgentTrouble };

/** Compiled; the sea's process never loads it. */
const AGENT = fileURLToPath(new URL('../../onboard/main.js', import.meta.url));
const END_MS = 2000;
const LINE_LENGTH_MAX = 10_000;

export interface ProcessOptions {
  readonly bus: Bus;
  readonly bench: string;
  readonly missions: readonly Mission[];
  readonly qos?: Qos;
  /** Vehicles for which no agent is started: foreign ones are waited for, however long it takes. */
  readonly leave?: readonly string[];
  /** Program and arguments that start an agent; the default is this build's own. */
  readonly agent?: readonly string[];
  /** What agents say on standard error, a line at a time. */
  readonly onLine?: (vehicle: string, line: string) => void;
  /** Gives up waiting, or fails the tick that is being waited for. */
  readonly signal?: AbortSignal;
}

export interface ProcessAgents extends LockstepAgents {
  /** Process ids of the agents that were started, by vehicle. */
  readonly pids: ReadonlyMap<string, number>;
}

interface Fleet {
  readonly options: ProcessOptions;
  readonly vehicles: readonly string[];
  readonly children: Map<string, ChildProcess>;
  readonly ready: Readiness;
  readonly lockstep: LockstepAgents;
  isOver: boolean;
}

/** Starts every agent and waits until all are ready; throws AgentTrouble if one will not be. */
export async function processAgents(options: ProcessOptions): Promise<ProcessAgents> {
  const { bus, bench, missions, leave = [], signal } = options;
  const vehicles = missions.map(({ vehicle }) => vehicle);
  const lockstep = await lockstepAgents({ bus, bench, vehicles });
  const ready = await watchStatuses({ bus, bench, vehicles, leave, lockstep });
  const fleet: Fleet = { options, vehicles, children: new Map(), ready, lockstep, isOver: false };
  for (const mission of missions) {
    bus.publish(vehicleTopic(bench, mission.vehicle, 'mission'), writeMessage(mission), { retain: true });
  }
  const endAll = (): void => {
    for (const child of fleet.children.values()) child.kill('SIGKILL');
  };
  const onAbort = (): void => { failAll(fleet, 'stopped by a signal', null); };
  process.once('exit', endAll);
  signal?.addEventListener('abort', onAbort, { once: true });
  const close = async (): Promise<void> => {
    signal?.removeEventListener('abort', onAbort);
    await endFleet(fleet, endAll);
    process.removeListener('exit', endAll);
  };
  for (const vehicle of vehicles) if (!leave.includes(vehicle)) startAgent(fleet, vehicle);
  const pids = new Map([...fleet.children].map(([vehicle, child]) => [vehicle, child.pid ?? -1]));
  if (signal?.aborted === true) onAbort();
  try {
    await ready.all;
  } catch (error) {
    await close();
    throw error;
  }
  return { ...lockstep, pids, close };
}

function failAll({ ready, lockstep }: Fleet, reason: string, vehicle: string | null): void {
  ready.fail(new AgentTrouble(vehicle, reason));
  lockstep.fail(reason, vehicle);
}

function startAgent(fleet: Fleet, vehicle: string): void {
  const { bench, bus, qos = 0, agent = [process.execPath, AGENT, '--tied'], onLine } = fleet.options;
  const child = spawn(agent[0]!, [
    ...agent.slice(1), '--vehicle', vehicle, '--bench', bench, '--broker', bus.url, '--qos', String(qos),
  ], { stdio: ['pipe', 'ignore', 'pipe'] });
  fleet.children.set(vehicle, child);
  const gone = (how: string): void => {
    fleet.children.delete(vehicle);
    if (!fleet.isOver) failAll(fleet, `the agent of ${vehicle} ${how}`, vehicle);
  };
  child.once('error', (error) => { gone(`could not be started: ${error.message}`); });
  child.once('exit', (code, signal) => { gone(`ended (${signal ?? `exit ${code}`})`); });
  child.stdin!.on('error', () => undefined);
  let rest = '';
  child.stderr!.setEncoding('utf8').on('data', (text: string) => {
    const lines = (rest + text).split('\n');
    rest = lines.pop()!.slice(0, LINE_LENGTH_MAX);
    for (const line of lines) onLine?.(vehicle, line);
  });
}

/** Tells the agents that the run is over, gives them a moment to go, ends the rest, clears what was retained. */
async function endFleet(fleet: Fleet, endAll: () => void): Promise<void> {
  const { options: { bus, bench, missions }, vehicles, children, lockstep, ready } = fleet;
  fleet.isOver = true;
  await lockstep.close();
  ready.close();
  const tick = Math.max(0, lockstep.lastTick());
  const over: SeaTick = { tick, time_s: tick * missions[0]!.tick_s, phase: 'ended' };
  bus.publish(seaTopic(bench, 'tick'), writeMessage(over));
  const untilMs = performance.now() + END_MS;
  while (children.size > 0 && performance.now() < untilMs) {
    await new Promise((resolve) => { setTimeout(resolve, 10); });
  }
  endAll();
  for (const vehicle of vehicles) {
    bus.publish(vehicleTopic(bench, vehicle, 'mission'), new Uint8Array(0), { retain: true });
    bus.publish(vehicleTopic(bench, vehicle, 'status'), new Uint8Array(0), { retain: true });
  }
}
