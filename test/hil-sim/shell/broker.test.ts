/** The embedded broker and the road to an outside one, over real sockets on this machine. */
import { spawn } from 'node:child_process';
import { createConnection } from 'node:net';
import { connectAsync, type MqttClient } from 'mqtt';
import { beforeAll, describe, expect, it } from 'vitest';
import { startBroker } from '../../../hil-sim/shell/broker.ts';
import type { Bus } from '../../../hil-sim/shell/bus.ts';
import { BrokerTrouble, joinBroker } from '../../../hil-sim/shell/external-broker.ts';
import { build } from '../../support/build.ts';
import { sleep, waitUntil } from '../../support/process-runs.ts';

beforeAll(build, 60_000);

async function withClient(bus: Bus, use: (client: MqttClient) => Promise<void>): Promise<void> {
  const client = await connectAsync(bus.url, { protocolVersion: 4, reconnectPeriod: 0 });
  try {
    await use(client);
  } finally {
    await client.endAsync(true);
    await bus.close();
  }
}

/** An outside broker and the way to end it. */
async function outsideBroker(): Promise<{ url: string; end: () => void }> {
  const child = spawn(process.execPath, [new URL('../../support/broker-process.mjs', import.meta.url).pathname], {
    stdio: ['pipe', 'pipe', 'inherit'],
  });
  const port = await new Promise<string>((resolve) => {
    child.stdout.setEncoding('utf8').once('data', (text: string) => { resolve(text.trim()); });
  });
  return { url: `mqtt://127.0.0.1:${port}`, end: () => { child.stdin.end(); } };
}

describe('the embedded broker', () => {
  it('carries messages both ways, and retained ones to those who come later', async () => {
    const bus = await startBroker();
    const heard: string[] = [];
    await bus.subscribe('drywake/b/+/steer', (topic, bytes) => { heard.push(`${topic} ${Buffer.from(bytes).toString()}`); });
    bus.publish('drywake/b/amber/mission', Buffer.from('go'), { retain: true });
    bus.publish('drywake/b/amber/sense', Buffer.from('lost on nobody'));
    await withClient(bus, async (client) => {
      const got: string[] = [];
      client.on('message', (topic, bytes) => { got.push(`${topic} ${bytes.toString()}`); });
      await client.subscribeAsync('drywake/b/amber/+');
      await client.publishAsync('drywake/b/amber/steer', 'aye', { qos: 1 });
      bus.publish('drywake/b/amber/sense', Buffer.from('there'));
      await waitUntil(() => got.length >= 3, 2000);
      expect(got).toEqual(['drywake/b/amber/mission go', 'drywake/b/amber/steer aye', 'drywake/b/amber/sense there']);
      expect(heard).toEqual(['drywake/b/amber/steer aye']);
    });
  });

  it('is on this machine only, and refuses a port that is taken', async () => {
    const bus = await startBroker();
    expect(bus.url).toMatch(/^mqtt:\/\/127\.0\.0\.1:\d+$/);
    await expect(startBroker({ port: Number(new URL(bus.url).port) })).rejects.toThrow('EADDRINUSE');
    await bus.close();
  });

  it('outlives callers that do not speak MQTT, and closes while they hold on', async () => {
    const bus = await startBroker();
    const port = Number(new URL(bus.url).port);
    const rude = createConnection({ port, host: '127.0.0.1' }).on('error', () => undefined);
    rude.write(Buffer.alloc(5000, 0xff));
    const silent = createConnection({ port, host: '127.0.0.1' }).on('error', () => undefined);
    await sleep(100);
    await withClient(bus, async (client) => { await client.publishAsync('drywake/b/amber/steer', 'x', { qos: 1 }); });
    expect(await waitUntil(() => silent.destroyed, 2000)).toBe(true);
    rude.destroy();
  });
});

describe('an outside broker', () => {
  it('is joined, carries messages both ways, and is left', async () => {
    const outside = await outsideBroker();
    const bus = await joinBroker({ url: outside.url, bench: 'b', vehicles: ['amber', 'cobalt'] });
    const heard: string[] = [];
    await bus.subscribe('drywake/b/+/steer', (topic) => { heard.push(topic); });
    await bus.subscribe('drywake/b/+/status', () => { heard.push('status'); });
    await withClient(bus, async (client) => {
      await client.publishAsync('drywake/b/amber/steer', 'aye', { qos: 1 });
      await client.publishAsync('drywake/b/sea/steer/x', 'no', { qos: 1 });
      await waitUntil(() => heard.length > 0, 2000);
      await sleep(50);
      expect(heard).toEqual(['drywake/b/amber/steer']);
    });
    outside.end();
  });

  it('hears the sea\'s last will when the sea is cut off, so that agents do not wait for ever', async () => {
    const outside = await outsideBroker();
    const client = await connectAsync(outside.url, { protocolVersion: 4 });
    const heard: string[] = [];
    client.on('message', (topic, bytes) => { heard.push(`${topic} ${bytes.toString()}`); });
    await client.subscribeAsync('drywake/b/sea/+');
    const script = `import { joinBroker } from ${JSON.stringify(
      new URL('../../../dist/hil-sim/shell/external-broker.js', import.meta.url).href)};`
      + `await joinBroker({ url: ${JSON.stringify(outside.url)}, bench: 'b', vehicles: [] }); process.kill(process.pid, 'SIGKILL');`;
    spawn(process.execPath, ['--input-type=module', '-e', script], { stdio: ['ignore', 'ignore', 'inherit'] });
    await waitUntil(() => heard.length > 0, 5000);
    expect(heard).toEqual(['drywake/b/sea/tick {"tick":0,"time_s":0,"phase":"failed"}']);
    await client.endAsync(true);
    outside.end();
  });

  it('that is not there is named in the failure', async () => {
    const bus = await startBroker();
    await bus.close();
    const failure = await joinBroker({ url: bus.url, bench: 'b', vehicles: [], withinMs: 700 }).catch((error: unknown) => error);
    expect(failure).toBeInstanceOf(BrokerTrouble);
    expect(String(failure)).toContain(bus.url);
  });
});
