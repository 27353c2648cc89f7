/**
 * The onboard shell: MQTT on one side, the core on the other, one pipeline between them. What becomes of
 * each message is decided in answering.ts; here are the connection, the last will, the low-rate status
 * and the ways out.
 */
import { connect, type MqttClient } from 'mqtt';
import { Subject, filter, fromEvent, map, takeUntil, throttleTime } from 'rxjs';
import { writeMessage } from '../messages/codec.ts';
import type { Status } from '../messages/status.ts';
import { seaTopic, vehicleTopic } from '../messages/topics.ts';
import {
  isRunOver, startAnswering, statusOf, takeMission, takeSense, type Answering, type Memory,
} from './answering.ts';

const RECONNECT_MS = 500;
const KEEP_ALIVE_S = 30;
/** Shortest wall time between two statuses. */
const STATUS_MS = 1000;
/** An agent that has a mission and no broker for so long ends; one without a mission waits on. */
const LOST_MS = 30_000;
/** Time for the last words to leave. */
const FAREWELL_MS = 1000;

export interface ShellOptions {
  readonly vehicle: string;
  readonly bench: string;
  readonly broker: string;
  readonly qos: 0 | 1;
  readonly memory: Memory | null;
  /** Where a person is told what the agent waits for. */
  readonly onNote: (line: string) => void;
}

/** How a shell ended: the sea said that the run is over, or what went wrong. */
export type ShellEnd = { readonly ok: true } | { readonly ok: false; readonly reason: string };

interface Shell {
  readonly options: ShellOptions;
  readonly topics: Readonly<Record<'mission' | 'sense' | 'steer' | 'status' | 'tick', string>>;
  readonly answering: Answering;
  readonly client: MqttClient;
  readonly changed: Subject<void>;
  readonly ended: Subject<ShellEnd>;
}

/** Runs one agent until the sea ends the run, the broker is lost or refuses it, or `stop` fires with a reason. */
export function runShell(options: ShellOptions, stop: AbortSignal): Promise<ShellEnd> {
  const shell = connectShell(options);
  const { client, ended, answering } = shell;
  const over = new Promise<ShellEnd>((resolve) => {
    ended.subscribe((end) => {
      sayStatus(shell, end.ok ? statusOf(answering, 'ended') : statusOf(answering, 'failed', end.reason));
      const done = (): void => {
        clearTimeout(timer);
        resolve(end);
      };
      const leave = (): void => { client.end(true, done); };
      const timer = setTimeout(leave, FAREWELL_MS);
      if (!client.connected) return leave();
      client.once('close', leave); // nothing more can leave
      client.end(false, done);
    });
  });
  joinPipeline(shell);
  keepConnected(shell);
  const onStop = (): void => { ended.next({ ok: false, reason: String(stop.reason) }); };
  if (stop.aborted) onStop();
  else stop.addEventListener('abort', onStop, { once: true });
  return over;
}

function connectShell(options: ShellOptions): Shell {
  const { vehicle, bench } = options;
  const answering = startAnswering(vehicle, options.memory);
  const topics = {
    mission: vehicleTopic(bench, vehicle, 'mission'),
    sense: vehicleTopic(bench, vehicle, 'sense'),
    steer: vehicleTopic(bench, vehicle, 'steer'),
    status: vehicleTopic(bench, vehicle, 'status'),
    tick: seaTopic(bench, 'tick'),
  };
  const will = Buffer.from(writeMessage(statusOf(answering, 'gone')));
  const client = connect(options.broker, {
    protocolVersion: 4,
    clientId: `drywake-${bench}-${vehicle}`,
    clean: true,
    resubscribe: false,
    keepalive: KEEP_ALIVE_S,
    reconnectPeriod: RECONNECT_MS,
    will: { topic: topics.status, payload: will, qos: 1, retain: true },
  });
  return { options, topics, answering, client, changed: new Subject(), ended: new Subject() };
}

/** Sense in, codec, step, codec, steer out; beside it mission, status and the end of the run. */
function joinPipeline(shell: Shell): void {
  const { client, topics, answering, ended, changed, options: { qos } } = shell;
  const fail = (error: unknown): void => {
    ended.next({ ok: false, reason: error instanceof Error ? error.stack ?? error.message : String(error) });
  };
  const arrived = fromEvent(client as never, 'message', (topic: string, bytes: Uint8Array) => ({ topic, bytes }));
  const on = (wanted: string) => arrived.pipe(
    takeUntil(ended), filter(({ topic }) => topic === wanted), map(({ bytes }) => bytes),
  );

  on(topics.sense).pipe(
    map((bytes) => takeSense(answering, bytes)),
  ).subscribe({
    next: (steer) => {
      if (steer !== null) client.publish(topics.steer, steer as Buffer, { qos });
      changed.next();
    },
    error: fail,
  });
  on(topics.mission).pipe(map((bytes) => takeMission(answering, bytes))).subscribe({
    next: (isNew) => (isNew ? sayStatus(shell, statusOf(answering)) : changed.next()),
    error: fail,
  });
  on(topics.tick).pipe(filter((bytes) => isRunOver(answering, bytes))).subscribe(() => { ended.next({ ok: true }); });
  changed.pipe(
    takeUntil(ended), filter(() => answering.mission !== null),
    throttleTime(STATUS_MS, undefined, { leading: true, trailing: true }),
  ).subscribe(() => { sayStatus(shell, statusOf(answering)); });
}

function sayStatus({ client, topics }: Shell, status: Status): void {
  client.publish(topics.status, Buffer.from(writeMessage(status)), { qos: 1, retain: true });
}

function keepConnected({ client, topics, answering, changed, ended, options }: Shell): void {
  let lost: NodeJS.Timeout | undefined;
  let told = false;
  let isOver = false;
  client.on('connect', () => {
    clearTimeout(lost);
    lost = undefined;
    noDelay(client);
    answering.mayJump = true;
    client.subscribe([topics.mission, topics.sense, topics.tick], { qos: options.qos });
    changed.next();
  });
  client.on('close', () => {
    if (isOver) return;
    if (answering.mission === null) {
      if (!told) options.onNote(`waiting for a broker at ${options.broker}`);
      told = true;
      return;
    }
    lost ??= setTimeout(() => {
      ended.next({ ok: false, reason: `the broker has been gone for ${LOST_MS / 1000} s` });
    }, LOST_MS);
  });
  client.on('error', (error) => {
    // A number is the broker's own answer to the connection; texts are the network's, and pass.
    if ('code' in error && typeof error.code === 'number') {
      ended.next({ ok: false, reason: `the broker refused: ${error.message}` });
    }
  });
  ended.subscribe(() => {
    isOver = true;
    clearTimeout(lost);
  });
}

/** Nagle's algorithm off: it would hold every steer back for a delayed acknowledgement. */
function noDelay(client: MqttClient): void {
  const stream = client.stream as { setNoDelay?: (on: boolean) => void };
  stream.setNoDelay?.(true);
}
