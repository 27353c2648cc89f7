/**
 * Lockstep: the sea waits for every steer of a tick. A missing one is asked for again after a second of
 * wall time and given up after ten; a steer that is garbled, foreign, late or a second time is refused
 * and counted, and never reaches the sea.
 */
import { readMessage, writeMessage } from '../../messages/codec.ts';
import type { Sense } from '../../messages/sense.ts';
import { steerSchema, type Steer } from '../../messages/steer.ts';
import { everyVehicle, readTopic, vehicleTopic } from '../../messages/topics.ts';
import { RunFailure, type Agents } from '../run/run-trial.ts';
import type { Bus } from './bus.ts';

const ASK_AGAIN_MS = 1000;
const GIVE_UP_MS = 10_000;

export interface LockstepAgents extends Agents {
  /** Ends the run: the tick that is being waited for fails with this reason. */
  fail(reason: string, vehicle: string | null): void;
  /** Steers refused so far, by reason. */
  readonly refused: ReadonlyMap<string, number>;
}

interface Waiting {
  readonly tick: number;
  readonly senses: readonly Sense[];
  readonly steers: (Steer | null)[];
  missing: number;
  readonly startedMs: number;
  askedMs: number;
  readonly resolve: (steers: readonly Steer[]) => void;
  readonly reject: (failure: RunFailure) => void;
}

/** Agents behind a bus, in fleet order. */
export async function lockstepAgents(bus: Bus, bench: string, vehicles: readonly string[]): Promise<LockstepAgents> {
  const senseTopics = vehicles.map((vehicle) => vehicleTopic(bench, vehicle, 'sense'));
  const refused = new Map<string, number>();
  let waiting: Waiting | null = null;
  let failure: RunFailure | null = null;

  const refuse = (reason: string): void => {
    refused.set(reason, (refused.get(reason) ?? 0) + 1);
  };

  const take = (topic: string, bytes: Uint8Array): void => {
    const reading = readTopic(topic);
    const index = reading?.of === 'vehicle' ? vehicles.indexOf(reading.vehicle) : -1;
    if (index < 0) return refuse('foreign');
    const message = readMessage(steerSchema, bytes);
    if (!message.ok) return refuse('garbled');
    const steer = message.value;
    if (waiting === null || steer.tick !== waiting.tick) return refuse('another tick');
    if (waiting.steers[index] !== null) return refuse('repeated');
    if (steer.heard.length !== waiting.senses[index]!.heard.length) return refuse('garbled');
    waiting.steers[index] = steer;
    waiting.missing -= 1;
    if (waiting.missing > 0) return;
    const { steers, resolve } = waiting;
    waiting = null;
    resolve(steers as Steer[]);
  };
  await bus.subscribe(everyVehicle(bench, 'steer'), take);

  const watch = setInterval(() => {
    if (waiting === null) return;
    const nowMs = performance.now();
    const index = waiting.steers.indexOf(null);
    if (nowMs - waiting.startedMs >= GIVE_UP_MS) {
      const { reject, tick } = waiting;
      waiting = null;
      reject(new RunFailure(`no steer from ${vehicles[index]!} for ${GIVE_UP_MS / 1000} s`, tick, vehicles[index]!));
    } else if (nowMs - waiting.askedMs >= ASK_AGAIN_MS) {
      waiting.askedMs = nowMs;
      for (let at = 0; at < vehicles.length; at++) {
        if (waiting.steers[at] === null) bus.publish(senseTopics[at]!, writeMessage(waiting.senses[at]));
      }
    }
  }, ASK_AGAIN_MS / 4);

  return {
    refused,
    answer(senses) {
      if (failure !== null) return Promise.reject(failure);
      return new Promise((resolve, reject) => {
        const nowMs = performance.now();
        waiting = {
          tick: senses[0]!.tick, senses, steers: new Array<Steer | null>(senses.length).fill(null),
          missing: senses.length, startedMs: nowMs, askedMs: nowMs, resolve, reject,
        };
        for (let index = 0; index < senses.length; index++) {
          bus.publish(senseTopics[index]!, writeMessage(senses[index]));
        }
      });
    },
    fail(reason, vehicle) {
      failure ??= new RunFailure(reason, waiting?.tick ?? 0, vehicle);
      waiting?.reject(failure);
      waiting = null;
    },
    close() {
      clearInterval(watch);
    },
  };
}
