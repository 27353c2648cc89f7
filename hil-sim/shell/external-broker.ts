/**
 * A broker that runs elsewhere, reached over MQTT 3.1.1 with Nagle's algorithm off. Should this process
 * die, the broker tells the agents so: the last will is the sea's own word that the run has failed.
 */
import { connect, type MqttClient } from 'mqtt';
import { writeMessage } from '../../messages/codec.ts';
import type { SeaTick } from '../../messages/sea.ts';
import { seaTopic } from '../../messages/topics.ts';
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
  readonly qos?: Qos;
  readonly withinMs?: number;
}

/** Joins the broker at `url`, or throws BrokerTrouble if it cannot within ten seconds. */
export async function joinBroker({ url, bench, qos = 0, withinMs = CONNECT_MS }: JoinOptions): Promise<Bus> {
  const last: SeaTick = { tick: 0, time_s: 0, phase: 'failed' };
  const client = connect(url, {
    protocolVersion: 4,
    clean: true,
    reconnectPeriod: RECONNECT_MS,
    will: { topic: seaTopic(bench, 'tick'), payload: Buffer.from(writeMessage(last)), qos: 1, retain: false },
  });
  const handlers: { readonly matches: (topic: string) => boolean; readonly handler: Handler }[] = [];
  client.on('connect', () => {
    const stream = client.stream as { setNoDelay?: (on: boolean) => void };
    stream.setNoDelay?.(true);
  });
  client.on('message', (topic, bytes) => {
    for (const { matches, handler } of handlers) if (matches(topic)) handler(topic, bytes);
  });
  await waitForConnection(client, url, withinMs);
  return {
    url,
    publish(topic, bytes, { retain = false } = {}) {
      client.publish(topic, Buffer.from(bytes.buffer, bytes.byteOffset, bytes.byteLength), { qos, retain });
    },
    async subscribe(filter, handler) {
      handlers.push({ matches: matcher(filter), handler });
      await client.subscribeAsync(filter, { qos });
    },
    close: () => new Promise((resolve) => {
      const timer = setTimeout(() => { client.end(true, () => { resolve(); }); }, FAREWELL_MS);
      client.end(false, () => {
        clearTimeout(timer);
        resolve();
      });
    }),
  };
}

/** Whether a topic fits a filter; `+` stands for one level, and is the only wildcard that the bench uses. */
function matcher(filter: string): (topic: string) => boolean {
  const wanted = filter.split('/');
  return (topic) => {
    const levels = topic.split('/');
    return levels.length === wanted.length && wanted.every((level, at) => level === '+' || level === levels[at]);
  };
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
