/**
 * A broker that runs elsewhere, reached over MQTT 3.1.1. The bench keeps one connection per vehicle, and
 * one for its own topics: a broker with Nagle's algorithm on, as many are set up, holds back the second
 * small message to one client until the first is acknowledged, and lockstep falls to some 20 ticks a
 * second. With one vehicle to a connection each message carries the acknowledgement of the one before.
 *
 * Should this process die, the broker tells the agents so: the last will is the sea's own word that the
 * run has failed.
 */
import { connect, type IClientOptions, type MqttClient } from 'mqtt';
import { writeMessage } from '../../messages/codec.ts';
import type { SeaTick } from '../../messages/sea.ts';
import { VEHICLE_TOPICS, everyVehicle, readTopic, seaTopic, vehicleTopic } from '../../messages/topics.ts';
import type { Bus, Handler, Qos } from './bus.ts';

const CONNECT_MS = 10_000;
const RECONNECT_MS = 500;
const FAREWELL_MS = 1000;

/** A broker that cannot be reached; the message names it. */
export class BrokerTrouble extends Error {
  override readonly name = 'BrokerTrouble';
}

export interface JoinOptions {
  readonly url: string;
  readonly bench: string;
  /** Names of the vehicles that the bench speaks with. */
  readonly vehicles: readonly string[];
  readonly qos?: Qos;
  readonly withinMs?: number;
}

/** Joins the broker at `url`, or throws BrokerTrouble if it cannot within ten seconds. */
export async function joinBroker(options: JoinOptions): Promise<Bus> {
  const { url, bench, vehicles, qos = 0 } = options;
  const last: SeaTick = { tick: 0, time_s: 0, phase: 'failed' };
  const own = await join(options, {
    will: { topic: seaTopic(bench, 'tick'), payload: Buffer.from(writeMessage(last)), qos: 1, retain: false },
  });
  const joined = await Promise.allSettled(vehicles.map((vehicle) =>
    join(options, {}).then((client) => [vehicle, client] as const)));
  const lines = new Map(joined.flatMap((line) => (line.status === 'fulfilled' ? [line.value] : [])));
  const all = [own, ...lines.values()];
  const lost = joined.find((line) => line.status === 'rejected');
  if (lost !== undefined) {
    for (const client of all) client.end(true);
    throw lost.reason;
  }
  const lineOf = (topic: string): MqttClient => {
    const reading = readTopic(topic);
    return (reading?.of === 'vehicle' ? lines.get(reading.vehicle) : undefined) ?? own;
  };
  return {
    url,
    publish(topic, bytes, { retain = false } = {}) {
      lineOf(topic).publish(topic, Buffer.from(bytes.buffer, bytes.byteOffset, bytes.byteLength), { qos, retain });
    },
    async subscribe(filter, handler) {
      for (const topic of topicsOf(filter, bench, vehicles)) await hear(lineOf(topic), topic, { handler, qos });
    },
    close: async () => { await Promise.all(all.map(leave)); },
  };
}

/** A filter over every vehicle as the topics of those that the bench speaks with; any other as it is. */
function topicsOf(filter: string, bench: string, vehicles: readonly string[]): string[] {
  const what = VEHICLE_TOPICS.find((known) => everyVehicle(bench, known) === filter);
  return what === undefined ? [filter] : vehicles.map((vehicle) => vehicleTopic(bench, vehicle, what));
}

async function hear(client: MqttClient, wanted: string, how: { handler: Handler; qos: Qos }): Promise<void> {
  client.on('message', (topic, bytes) => {
    if (topic === wanted) how.handler(topic, bytes);
  });
  await client.subscribeAsync(wanted, { qos: how.qos });
}

async function join({ url, withinMs = CONNECT_MS }: JoinOptions, more: IClientOptions): Promise<MqttClient> {
  const client = connect(url, { protocolVersion: 4, clean: true, reconnectPeriod: RECONNECT_MS, ...more });
  client.on('connect', () => {
    const stream = client.stream as { setNoDelay?: (on: boolean) => void };
    stream.setNoDelay?.(true);
  });
  await waitForConnection(client, url, withinMs);
  return client;
}

function leave(client: MqttClient): Promise<void> {
  return new Promise((resolve) => {
    const timer = setTimeout(() => { client.end(true, () => { resolve(); }); }, FAREWELL_MS);
    client.end(false, () => {
      clearTimeout(timer);
      resolve();
    });
  });
}

function waitForConnection(client: MqttClient, url: string, withinMs: number): Promise<void> {
  return new Promise((resolve, reject) => {
    let why = 'no answer';
    const fail = (): void => {
      client.end(true);
      reject(new BrokerTrouble(`no broker at ${url} within ${withinMs / 1000} s: ${why}`));
    };
    const timer = setTimeout(fail, withinMs);
    client.on('error', (error) => {
      why = error.message === '' ? why : error.message;
      if ('code' in error && typeof error.code === 'number' && !client.connected) {
        clearTimeout(timer);
        fail();
      }
    });
    client.once('connect', () => {
      clearTimeout(timer);
      resolve();
    });
  });
}
