/**
 * Lockstep: the sea waits for every steer of a tick. A missing one is asked for again after a second of
 * wall time and given up after ten; a steer that is garbled, foreign, of another tick or a second time
 * is refused and counted, and never reaches the sea.
 */
import { readMessage, writeMessage } from '../../messages/codec.ts';
import { normalise } from '../../messages/normalise.ts';
import type { Sense } from '../../messages/sense.ts';
import { fitsSteer } from '../../messages/fits.ts';
import { steerSchema, type Steer } from '../../messages/steer.ts';
import { everyVehicle, readTopic, vehicleTopic } from '../../messages/topics.ts';
import type { InterruptibleAgents } from '../run/paced.ts';
import { RunFailure, type Agents } from '../run/run-trial.ts';
import type { Bus } from './bus.ts';

const ASK_AGAIN_MS = 1000;
const GIVE_UP_MS = 10_000;

/** Why a steer is refused. */
export const STEER_REFUSALS = [
  'foreign', 'garbled', 'another tick', 'repeated', 'not asked', 'fates do not fit',
] as const;
export type SteerRefusal = (typeof STEER_REFUSALS)[number];

/** All of Agents but starting and ending them, which a bus cannot do. */
export interface LockstepAgents extends Omit<InterruptibleAgents, 'restart'> {
  /** Ends the run: the tick that is being waited for, or else the next one, fails with this reason. */
  fail(reason: string, vehicle: string | null): void;
  /** Steers refused so far, by reason. */
  readonly refused: Readonly<Record<SteerRefusal, number>>;
  /** The last tick whose steers were all there; -1 before the first. */
  lastTick(): number;
}

export interface LockstepOptions {
  readonly bus: Bus;
  readonly bench: string;
  /** Names in fleet order. */
  readonly vehicles: readonly string[];
  readonly askAgainMs?: number;
  readonly giveUpMs?: number;
}

/** One tick that is not yet answered. */
interface Waiting {
  readonly tick: number;
  readonly senses: readonly (Sense | null)[];
  readonly steers: (Steer | null)[];
  missing: number;
  readonly startedMs: number;
  askedMs: number;
  readonly resolve: (steers: readonly (Steer | null)[]) => void;
  readonly reject: (failure: RunFailure) => void;
}

interface Lockstep {
  readonly options: LockstepOptions;
  readonly senseTopics: readonly string[];
  readonly refused: Record<SteerRefusal, number>;
  waiting: Waiting | null;
  failed: { readonly reason: string; readonly vehicle: string | null } | null;
  lastTick: number;
}

/** Agents behind a bus, in fleet order. */
export async function lockstepAgents(options: LockstepOptions): Promise<LockstepAgents> {
  const { bus, bench, vehicles, askAgainMs = ASK_AGAIN_MS } = options;
  const lockstep: Lockstep = {
    options,
    senseTopics: vehicles.map((vehicle) => vehicleTopic(bench, vehicle, 'sense')),
    refused: { foreign: 0, garbled: 0, 'another tick': 0, repeated: 0, 'not asked': 0, 'fates do not fit': 0 },
    waiting: null,
    failed: null,
    lastTick: -1,
  };
  await bus.subscribe(everyVehicle(bench, 'steer'), (topic, bytes) => {
    const refusal = take(lockstep, topic, bytes);
    if (refusal !== null) lockstep.refused[refusal] += 1;
  });
  const watch = setInterval(() => { lookAtTheClock(lockstep); }, askAgainMs / 4);
  return {
    refused: lockstep.refused,
    lastTick: () => lockstep.lastTick,
    answer: (senses) => ask(lockstep, senses),
    fail(reason, vehicle) {
      lockstep.failed ??= { reason, vehicle };
      if (lockstep.waiting !== null) giveUp(lockstep, lockstep.waiting);
    },
    settle: (standIns) => { settle(lockstep, standIns); },
    close() { clearInterval(watch); },
  };
}

type Answer = ReturnType<Agents['answer']>;

function ask(lockstep: Lockstep, senses: readonly (Sense | null)[]): Answer {
  const { options: { bus }, senseTopics, failed } = lockstep;
  const first = senses.find((sense) => sense !== null);
  if (first === undefined || first === null) return senses.map(() => null); // every agent is down by the script
  const { tick } = first;
  if (failed !== null) return Promise.reject(new RunFailure(failed.reason, tick, failed.vehicle));
  return new Promise((resolve, reject) => {
    const nowMs = performance.now();
    lockstep.waiting = {
      tick, senses, steers: new Array<Steer | null>(senses.length).fill(null), startedMs: nowMs, askedMs: nowMs,
      missing: senses.filter((sense) => sense !== null).length, resolve, reject,
    };
    for (let index = 0; index < senses.length; index++) {
      const sense = senses[index];
      if (sense !== null) bus.publish(senseTopics[index]!, writeMessage(normalise(sense)));
    }
  });
}

/** Ends the waiting with what is there, and stand-ins for the rest. */
function settle(lockstep: Lockstep, standIns: readonly (Steer | null)[]): void {
  const { waiting } = lockstep;
  if (waiting === null) return;
  for (let index = 0; index < waiting.steers.length; index++) {
    if (isMissing(waiting, index)) waiting.steers[index] = standIns[index] ?? null;
  }
  finish(lockstep, waiting);
}

function finish(lockstep: Lockstep, waiting: Waiting): void {
  lockstep.waiting = null;
  lockstep.lastTick = waiting.tick;
  waiting.resolve(waiting.steers);
}

/** Takes what came on a steer topic, or answers why it is refused. */
function take(lockstep: Lockstep, topic: string, bytes: Uint8Array): SteerRefusal | null {
  const { waiting, options: { vehicles } } = lockstep;
  const reading = readTopic(topic);
  const index = reading?.of === 'vehicle' ? vehicles.indexOf(reading.vehicle) : -1;
  if (index < 0) return 'foreign';
  const message = readMessage(steerSchema, bytes, fitsSteer);
  if (!message.ok) return 'garbled';
  const steer = message.value;
  if (waiting === null) return steer.tick === lockstep.lastTick ? 'repeated' : 'another tick';
  if (steer.tick !== waiting.tick) return 'another tick';
  const sense = waiting.senses[index] ?? null;
  if (sense === null) return 'not asked';
  if (waiting.steers[index] !== null) return 'repeated';
  if (steer.heard.length !== sense.heard.length) return 'fates do not fit';
  waiting.steers[index] = steer;
  waiting.missing -= 1;
  if (waiting.missing === 0) finish(lockstep, waiting);
  return null;
}

/** Asks again for what is missing too long, and gives up in the end. */
function lookAtTheClock(lockstep: Lockstep): void {
  const { waiting, senseTopics, options } = lockstep;
  const { vehicles, bus, askAgainMs = ASK_AGAIN_MS, giveUpMs = GIVE_UP_MS } = options;
  if (waiting === null) return;
  const nowMs = performance.now();
  if (nowMs - waiting.startedMs >= giveUpMs) {
    const late = vehicles.filter((_vehicle, index) => isMissing(waiting, index));
    const others = late.length > 1 ? ` (nor from ${late.slice(1).join(', ')})` : '';
    lockstep.failed ??= { reason: `no steer from ${late[0]!}${others} for ${giveUpMs / 1000} s`, vehicle: late[0]! };
    giveUp(lockstep, waiting);
  } else if (nowMs - waiting.askedMs >= askAgainMs) {
    waiting.askedMs = nowMs;
    for (let index = 0; index < vehicles.length; index++) {
      if (isMissing(waiting, index)) bus.publish(senseTopics[index]!, writeMessage(waiting.senses[index]));
    }
  }
}

function isMissing(waiting: Waiting, index: number): boolean {
  return waiting.senses[index] !== null && waiting.steers[index] === null;
}

function giveUp(lockstep: Lockstep, waiting: Waiting): void {
  const { reason, vehicle } = lockstep.failed!;
  lockstep.waiting = null;
  waiting.reject(new RunFailure(reason, waiting.tick, vehicle));
}
