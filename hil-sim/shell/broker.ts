/**
 * The embedded broker, in the sea's own process: MQTT 3.1.1 on a port of its own, on this machine only.
 * The sea publishes through the broker's own calls, without a socket. Nagle's algorithm is off on every
 * connection: left on, it costs a hundredfold in lockstep.
 */
import { createServer, type AddressInfo, type Server, type Socket } from 'node:net';
import { Aedes, type AedesPublishPacket } from 'aedes';
import type { Bus, Handler, Qos } from './bus.ts';

const LOCALHOST = '127.0.0.1';

export interface BrokerOptions {
  /** 0, the default, takes any free port. */
  readonly port?: number;
  readonly qos?: Qos;
}

/** Starts the broker. */
export async function startBroker({ port = 0, qos = 0 }: BrokerOptions = {}): Promise<Bus> {
  const aedes = await Aedes.createBroker({ heartbeatInterval: 60_000, concurrency: 0 });
  const sockets = new Set<Socket>();
  const server = createServer({ noDelay: true }, (socket) => {
    sockets.add(socket);
    socket.once('close', () => { sockets.delete(socket); });
    aedes.handle(socket);
  });
  await listen(server, port);
  return {
    url: `mqtt://${LOCALHOST}:${(server.address() as AddressInfo).port}`,
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
      aedes.close(() => {
        server.close(() => { resolve(); });
        // A caller that never spoke MQTT would otherwise hold the server open.
        for (const socket of sockets) socket.destroy();
      });
    }),
  };
}

function listen(server: Server, port: number): Promise<void> {
  return new Promise((resolve, reject) => {
    server.once('error', reject);
    server.listen(port, LOCALHOST, () => {
      server.removeListener('error', reject);
      resolve();
    });
  });
}
