/**
 * The embedded broker, in the sea's own process: MQTT 3.1.1 on a port of its own, on this machine only.
 * The sea publishes through the broker's own calls, without a socket. Nagle's algorithm is off on every
 * connection: left on, it costs a hundredfold in lockstep.
 */
import { createServer, type AddressInfo } from 'node:net';
import { Aedes, type AedesPublishPacket } from 'aedes';
import type { Bus, Handler, Qos } from './bus.ts';

const LOCALHOST = '127.0.0.1';

/** Starts the broker; port 0 takes any free one. */
export async function startBroker(options: { port?: number; qos?: Qos } = {}): Promise<Bus> {
  const qos = options.qos ?? 0;
  const aedes = await Aedes.createBroker({ heartbeatInterval: 60_000, concurrency: 0 });
  const server = createServer({ noDelay: true }, (socket) => { aedes.handle(socket); });
  await new Promise<void>((resolve, reject) => {
    server.once('error', reject);
    server.listen(options.port ?? 0, LOCALHOST, resolve);
  });
  const { port } = server.address() as AddressInfo;
  return {
    url: `mqtt://${LOCALHOST}:${port}`,
    publish(topic, bytes, { retain = false } = {}) {
      const payload = Buffer.from(bytes.buffer, bytes.byteOffset, bytes.byteLength);
      aedes.publish({ cmd: 'publish', topic, payload, qos, retain, dup: false }, () => undefined);
    },
    subscribe: (filter, handler: Handler) => new Promise((resolve) => {
      const deliver = (packet: AedesPublishPacket, done: () => void): void => {
        handler(packet.topic, packet.payload as Uint8Array);
        done();
      };
      aedes.subscribe(filter, deliver, resolve);
    }),
    close: () => new Promise((resolve) => {
      aedes.close(() => { server.close(() => { resolve(); }); });
    }),
  };
}
