/**
 * Agents as processes of their own, one per vehicle, joined by a broker. They are started from compiled
 * code, waited for, watched, and ended by their ids on every way out.
 */
import { spawn, type ChildProcess } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import { readMessage, writeMessage } from '../../messages/codec.ts';
import type { Mission } from '../../messages/mission.ts';
import { statusSchema } from '../../messages/status.ts';
import { everyVehicle, readTopic, seaTopic, vehicleTopic } from '../../messages/topics.ts';
import type { Bus, Qos } from '../shell/bus.ts';
import { lockstepAgents, type LockstepAgents } from '../shell/lockstep.ts';

/** Compiled; the sea's process never loads it. */
const AGENT = fileURLToPath(new URL('../../onboard/main.js', import.meta.url));
const READY_MS = 20_000;
const END_MS = 2000;

export interface ProcessOptions {
  readonly bus: Bus;
  readonly bench: string;
  readonly missions: readonly Mission[];
  readonly qos?: Qos;
  /** Program and arguments that start an agent; the default is this build's own. */
  readonly agent?: readonly string[];
  /** What agents say on standard error, a line at a time. */
  readonly onLine?: (vehicle: string, line: string) => void;
}

export interface ProcessAgents extends LockstepAgents {
  /** Process ids in fleet order. */
  readonly pids: readonly number[];
}

/** An agent that could not be started, or did not say that it is ready. */
export class AgentTrouble extends Error {
  override readonly name = 'AgentTrouble';
  constructor(readonly vehicle: string, message: string) {
    super(message);
  }
}

/** Starts every agent and waits until all are ready. */
export async function processAgents(options: ProcessOptions): Promise<ProcessAgents> {
  const { bus, bench, missions } = options;
  const vehicles = missions.map(({ vehicle }) => vehicle);
  const ready = watchStatuses(bus, bench, vehicles);
  await ready.listening;
  for (const mission of missions) {
    bus.publish(vehicleTopic(bench, mission.vehicle, 'mission'), writeMessage(mission), { retain: true });
  }
  const lockstep = await lockstepAgents(bus, bench, vehicles);
  const children = new Map<string, ChildProcess>();
  const endAll = (): void => {
    for (const child of children.values()) child.kill('SIGKILL');
  };
  process.once('exit', endAll);
  let isOver = false;
  for (const vehicle of vehicles) {
    const child = startAgent(options, vehicle);
    children.set(vehicle, child);
    child.once('exit', (code, signal) => {
      children.delete(vehicle);
      if (isOver) return;
      const reason = `the agent of ${vehicle} ended (${signal ?? `exit ${code}`})`;
      ready.fail(new AgentTrouble(vehicle, reason));
      lockstep.fail(reason, vehicle);
    });
  }
  const pids = vehicles.map((vehicle) => children.get(vehicle)?.pid ?? -1);
  const close = async (): Promise<void> => {
    isOver = true;
    await lockstep.close();
    bus.publish(seaTopic(bench, 'tick'), writeMessage({ tick: 0, time_s: 0, phase: 'ended' }));
    await waitForEnd(children);
    endAll();
    process.removeListener('exit', endAll);
    for (const vehicle of vehicles) {
      bus.publish(vehicleTopic(bench, vehicle, 'mission'), new Uint8Array(0), { retain: true });
      bus.publish(vehicleTopic(bench, vehicle, 'status'), new Uint8Array(0), { retain: true });
    }
  };
  try {
    await ready.all;
  } catch (error) {
    await close();
    throw error;
  }
  return { ...lockstep, pids, close };
}

function startAgent(options: ProcessOptions, vehicle: string): ChildProcess {
  const [program, ...before] = options.agent ?? [process.execPath, AGENT];
  const child = spawn(program!, [
    ...before, '--vehicle', vehicle, '--bench', options.bench, '--broker', options.bus.url, '--qos', String(options.qos ?? 0),
  ], { stdio: ['ignore', 'ignore', 'pipe'] });
  child.on('error', () => undefined);
  let rest = '';
  child.stderr!.setEncoding('utf8').on('data', (text: string) => {
    const lines = (rest + text).split('\n');
    rest = lines.pop()!.slice(0, 10_000);
    for (const line of lines) options.onLine?.(vehicle, line);
  });
  return child;
}

/** Resolves when every vehicle has said `ready`, or rejects with who did not. */
function watchStatuses(bus: Bus, bench: string, vehicles: readonly string[]): {
  listening: Promise<void>; all: Promise<void>; fail: (trouble: AgentTrouble) => void;
} {
  const missing = new Set(vehicles);
  let fail: (trouble: AgentTrouble) => void = () => undefined;
  let succeed: () => void = () => undefined;
  const all = new Promise<void>((resolve, reject) => {
    const timer = setTimeout(() => {
      const first = [...missing][0]!;
      reject(new AgentTrouble(first, `the agent of ${first} did not say that it is ready within ${READY_MS / 1000} s`));
    }, READY_MS);
    fail = (trouble) => { clearTimeout(timer); reject(trouble); };
    succeed = () => { clearTimeout(timer); resolve(); };
  });
  all.catch(() => undefined);
  const listening = bus.subscribe(everyVehicle(bench, 'status'), (topic, bytes) => {
    const reading = readTopic(topic);
    const status = readMessage(statusSchema, bytes);
    if (reading?.of !== 'vehicle' || !status.ok || status.value.vehicle !== reading.vehicle) return;
    if (status.value.phase === 'ready') missing.delete(reading.vehicle);
    if (status.value.phase === 'failed') fail(new AgentTrouble(reading.vehicle, status.value.reason ?? 'failed'));
    if (missing.size === 0) succeed();
  });
  return { listening, all, fail };
}

/** Gives agents a moment to end by themselves. */
async function waitForEnd(children: ReadonlyMap<string, ChildProcess>): Promise<void> {
  const untilMs = performance.now() + END_MS;
  while (children.size > 0 && performance.now() < untilMs) {
    await new Promise((resolve) => { setTimeout(resolve, 10); });
  }
}
