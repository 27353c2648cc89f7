/**
 * Agents as processes of their own, one per vehicle, joined by a broker. They are started from compiled
 * code, waited for, watched, and ended by their ids on every way out. Their standard input is tied to
 * this process: should it die in any way, they end too. A reboot by the script ends a process and starts
 * it again, and the sea waits for it.
 */
import { spawn, type ChildProcess } from 'node:child_process';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { writeMessage } from '../../messages/codec.ts';
import type { Mission } from '../../messages/mission.ts';
import type { SeaTick } from '../../messages/sea.ts';
import { seaTopic, vehicleTopic } from '../../messages/topics.ts';
import type { Bus, Qos } from '../shell/bus.ts';
import { lockstepAgents, type LockstepAgents } from '../shell/lockstep.ts';
import { AgentTrouble, watchStatuses, type Readiness } from '../shell/readiness.ts';
import type { InterruptibleAgents } from './paced.ts';
import { RunFailure } from './run-trial.ts';

export { AgentTrouble };

/** Compiled; the sea's process never loads it. */
const AGENT = fileURLToPath(new URL('../../onboard/main.js', import.meta.url));
const END_MS = 2000;
const LINE_LENGTH_MAX = 10_000;
/** An agent that dies more often than this in one run is not started again. */
const RESTARTS_MAX = 5;

export interface ProcessOptions {
  readonly bus: Bus;
  readonly bench: string;
  readonly missions: readonly Mission[];
  readonly qos?: Qos;
  /** Vehicles for which no agent is started: foreign ones are waited for, however long it takes. */
  readonly leave?: readonly string[];
  /** How long a steer is waited for; ten seconds unless given; Infinity for ever. */
  readonly giveUpMs?: number;
  /** Agents keep their memory in files, for reboots that need it. */
  readonly keepsMemory?: boolean;
  /** Starts a dead agent again, from its memory if it has one. */
  readonly restart?: boolean;
  /** Program and arguments that start an agent; the default is this build's own. */
  readonly agent?: readonly string[];
  /** What agents say on standard error, a line at a time. */
  readonly onLine?: (vehicle: string, line: string) => void;
  /** Gives up waiting, or fails the tick that is being waited for. */
  readonly signal?: AbortSignal;
}

export interface ProcessAgents extends LockstepAgents, InterruptibleAgents {
  /** Process ids of the agents that run, by vehicle. */
  pids(): ReadonlyMap<string, number>;
}

interface Fleet {
  readonly options: ProcessOptions;
  readonly vehicles: readonly string[];
  readonly children: Map<string, ChildProcess>;
  readonly ready: Readiness;
  readonly lockstep: LockstepAgents;
  /** Folder of the agents' memories, or null if they keep none. */
  readonly memories: string | null;
  /** Vehicles whose agent is down by the script. */
  readonly down: Set<string>;
  readonly restarts: Map<string, number>;
  isOver: boolean;
}

/** Starts every agent and waits until all are ready; throws AgentTrouble if one will not be. */
export async function processAgents(options: ProcessOptions): Promise<ProcessAgents> {
  const { bus, bench, missions, leave = [], signal } = options;
  const vehicles = missions.map(({ vehicle }) => vehicle);
  const times = options.giveUpMs === undefined ? {} : { giveUpMs: options.giveUpMs };
  const lockstep = await lockstepAgents({ bus, bench, vehicles, ...times });
  const ready = await watchStatuses({ bus, bench, vehicles, leave, lockstep });
  const isKept = options.keepsMemory === true || options.restart === true;
  const fleet: Fleet = {
    options, vehicles, ready, lockstep, children: new Map(), down: new Set(), restarts: new Map(), isOver: false,
    memories: isKept ? mkdtempSync(join(tmpdir(), 'drywake-memory-')) : null,
  };
  for (const mission of missions) {
    bus.publish(vehicleTopic(bench, mission.vehicle, 'mission'), writeMessage(mission), { retain: true });
  }
  const onExit = (): void => { killAll(fleet); };
  const onAbort = (): void => { failAll(fleet, 'stopped by a signal', null); };
  process.once('exit', onExit);
  signal?.addEventListener('abort', onAbort, { once: true });
  const close = async (): Promise<void> => {
    signal?.removeEventListener('abort', onAbort);
    await endFleet(fleet);
    process.removeListener('exit', onExit);
  };
  const allReady = ready.expect(vehicles);
  allReady.catch(() => undefined); // heard below; it may fail before
  for (const vehicle of vehicles) if (!leave.includes(vehicle)) startAgent(fleet, vehicle, false);
  if (signal?.aborted === true) onAbort();
  try {
    await allReady;
  } catch (error) {
    await close();
    throw error;
  }
  return {
    ...lockstep,
    close,
    pids: () => new Map([...fleet.children].map(([vehicle, child]) => [vehicle, child.pid ?? -1])),
    restart: (index, phase, memory) => reboot(fleet, vehicles[index]!, phase === 'down' ? 'down' : memory),
  };
}

function killAll({ children, memories }: Fleet): void {
  for (const child of children.values()) child.kill('SIGKILL');
  if (memories !== null) rmSync(memories, { recursive: true, force: true });
}

function failAll({ ready, lockstep }: Fleet, reason: string, vehicle: string | null): void {
  ready.fail(new AgentTrouble(vehicle, reason));
  lockstep.fail(reason, vehicle);
}

function startAgent(fleet: Fleet, vehicle: string, resume: boolean): void {
  const { bench, bus, qos = 0, agent = [process.execPath, AGENT, '--tied'], onLine } = fleet.options;
  const { memories } = fleet;
  const memory = memories === null ? [] : ['--memory', join(memories, vehicle), ...(resume ? ['--resume'] : [])];
  const child = spawn(agent[0]!, [
    ...agent.slice(1), '--vehicle', vehicle, '--bench', bench, '--broker', bus.url, '--qos', String(qos), ...memory,
  ], { stdio: ['pipe', 'ignore', 'pipe'] });
  fleet.children.set(vehicle, child);
  const gone = (how: string): void => {
    if (fleet.children.get(vehicle) !== child) return;
    fleet.children.delete(vehicle);
    if (!fleet.isOver && !fleet.down.has(vehicle)) lose(fleet, vehicle, how);
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

/** An agent has died: it is started again if that is wanted and it had begun; otherwise the run fails. */
function lose(fleet: Fleet, vehicle: string, how: string): void {
  const { options, restarts, ready, lockstep } = fleet;
  const count = restarts.get(vehicle) ?? 0;
  if (options.restart !== true || lockstep.lastTick() < 0 || count >= RESTARTS_MAX) {
    failAll(fleet, `the agent of ${vehicle} ${how}`, vehicle);
    return;
  }
  restarts.set(vehicle, count + 1);
  options.onLine?.(vehicle, `the agent ${how} and is started again (${count + 1} of at most ${RESTARTS_MAX} times)`);
  ready.expect([vehicle]).catch((error: Error) => { lockstep.fail(error.message, vehicle); });
  startAgent(fleet, vehicle, true);
}

/** A reboot by the script: the process ends, or starts anew and is waited for. */
async function reboot(fleet: Fleet, vehicle: string, how: 'down' | 'lost' | 'kept'): Promise<void> {
  const { children, down, ready, lockstep } = fleet;
  if (how !== 'down') {
    const isReady = ready.expect([vehicle]);
    down.delete(vehicle);
    startAgent(fleet, vehicle, how === 'kept');
    await isReady.catch((error: Error) => { throw new RunFailure(error.message, lockstep.lastTick() + 1, vehicle); });
    return;
  }
  const child = children.get(vehicle);
  if (child === undefined) {
    const why = `the script reboots ${vehicle}, but its agent is a foreign one, which the bench cannot end`;
    throw new RunFailure(why, lockstep.lastTick() + 1, vehicle);
  }
  down.add(vehicle);
  const ended = new Promise<void>((resolve) => { child.once('exit', () => { resolve(); }); });
  child.kill('SIGKILL');
  await ended;
}

/** Tells the agents that the run is over, gives them a moment to go, ends the rest, clears what was retained. */
async function endFleet(fleet: Fleet): Promise<void> {
  const { options: { bus, bench, missions }, vehicles, children, lockstep, ready } = fleet;
  fleet.isOver = true;
  await lockstep.close();
  ready.close();
  const tick = Math.max(0, lockstep.lastTick());
  const over: SeaTick = { tick, time_s: tick * missions[0]!.tick_s, phase: 'ended' };
  bus.publish(seaTopic(bench, 'tick'), writeMessage(over));
  await waitForExits(children);
  killAll(fleet);
  await waitForExits(children);
  for (const vehicle of vehicles) {
    bus.publish(vehicleTopic(bench, vehicle, 'mission'), new Uint8Array(0), { retain: true });
    bus.publish(vehicleTopic(bench, vehicle, 'status'), new Uint8Array(0), { retain: true });
  }
}

/** Waits until all have exited, but not for ever. */
async function waitForExits(children: ReadonlyMap<string, ChildProcess>): Promise<void> {
  const untilMs = performance.now() + END_MS;
  while (children.size > 0 && performance.now() < untilMs) {
    await new Promise((resolve) => { setTimeout(resolve, 5); });
  }
}
