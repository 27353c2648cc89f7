/**
 * The onboard shell: MQTT on one side, the core on the other, one pipeline between them. A message that
 * is garbled, foreign or out of order is refused and counted, and never reaches the core. Asked again
 * for a tick that it has answered, the agent gives the same steer.
 */
import { connect, type MqttClient } from 'mqtt';
import { Subject, filter, fromEvent, map, takeUntil, type Observable } from 'rxjs';
import { readMessage, writeMessage } from '../messages/codec.ts';
import { missionSchema, type Mission } from '../messages/mission.ts';
import { normalise } from '../messages/normalise.ts';
import { seaTickSchema } from '../messages/sea.ts';
import { senseSchema, type Sense } from '../messages/sense.ts';
import type { Status } from '../messages/status.ts';
import { seaTopic, vehicleTopic } from '../messages/topics.ts';
import { start, type State } from './core/state.ts';
import { step } from './core/step.ts';

const RECONNECT_MS = 500;
const KEEP_ALIVE_S = 30;
/** Senses between two statuses while nothing changes. */
const STATUS_TICKS = 300;

export interface ShellOptions {
  readonly vehicle: string;
  readonly bench: string;
  readonly broker: string;
  readonly qos: 0 | 1;
}

/** How a shell ended: the sea said that the run is over, or what went wrong. */
export type ShellEnd = { readonly ok: true } | { readonly ok: false; readonly reason: string };

interface Running {
  mission: Mission | null;
  state: State | null;
  lastTick: number;
  lastSteer: Uint8Array;
  refused: number;
  agentState: Status['state'];
}

interface Arrived {
  readonly topic: string;
  readonly bytes: Uint8Array;
}

/** Runs one agent until the sea ends the run, the broker refuses it, or `stop` fires. */
export function runShell(options: ShellOptions, stop: AbortSignal): Promise<ShellEnd> {
  const { vehicle, bench, qos } = options;
  const topics = {
    mission: vehicleTopic(bench, vehicle, 'mission'),
    sense: vehicleTopic(bench, vehicle, 'sense'),
    steer: vehicleTopic(bench, vehicle, 'steer'),
    status: vehicleTopic(bench, vehicle, 'status'),
    tick: seaTopic(bench, 'tick'),
  };
  const running: Running = {
    mission: null, state: null, lastTick: -1, lastSteer: new Uint8Array(0), refused: 0, agentState: null,
  };
  const statusOf = (phase: Status['phase'], reason: string | null = null): Status => ({
    vehicle, phase, tick: running.lastTick, state: running.agentState, refused: running.refused, reason,
  });
  const client = connect(options.broker, {
    protocolVersion: 4,
    clientId: `drywake-${bench}-${vehicle}`,
    clean: true,
    keepalive: KEEP_ALIVE_S,
    reconnectPeriod: RECONNECT_MS,
    will: { topic: topics.status, payload: Buffer.from(writeMessage(statusOf('gone'))), qos: 1, retain: true },
  });
  const sayStatus = (phase: Status['phase'], reason: string | null = null): void => {
    client.publish(topics.status, Buffer.from(writeMessage(statusOf(phase, reason))), { qos: 1, retain: true });
  };
  const ended = new Subject<ShellEnd>();
  client.on('connect', () => {
    noDelay(client);
    client.subscribe([topics.mission, topics.sense, topics.tick], { qos });
  });

  const arrived: Observable<Arrived> = fromEvent(client as never, 'message', (topic: string, payload: Uint8Array) => ({
    topic, bytes: payload,
  })).pipe(takeUntil(ended));

  arrived.pipe(filter(({ topic }) => topic === topics.mission)).subscribe(({ bytes }) => {
    if (bytes.length === 0) return;
    const reading = readMessage(missionSchema, bytes);
    if (!reading.ok || reading.value.vehicle !== vehicle) {
      running.refused += 1;
      return;
    }
    if (running.mission !== null) return;
    running.mission = reading.value;
    running.state = start(reading.value);
    sayStatus('ready');
  });

  arrived.pipe(
    filter(({ topic }) => topic === topics.sense),
    map(({ bytes }) => answer(running, bytes)),
    filter((steer) => steer !== null),
  ).subscribe((steer) => {
    client.publish(topics.steer, steer as Buffer, { qos });
    if (running.lastTick % STATUS_TICKS === 0) sayStatus('running');
  });

  arrived.pipe(filter(({ topic }) => topic === topics.tick)).subscribe(({ bytes }) => {
    const reading = readMessage(seaTickSchema, bytes);
    if (reading.ok && reading.value.phase !== 'running') ended.next({ ok: true });
  });

  stop.addEventListener('abort', () => { ended.next({ ok: false, reason: 'stopped by a signal' }); });
  client.on('error', (error) => {
    if ('code' in error && typeof error.code === 'number') ended.next({ ok: false, reason: `the broker refused: ${error.message}` });
  });
  return new Promise((resolve) => {
    ended.subscribe((end) => {
      sayStatus(end.ok ? 'ended' : 'failed', end.ok ? null : end.reason);
      client.end(false, () => { resolve(end); });
    });
  });
}

/** The steer for a sense's bytes, or null if they are refused. */
function answer(running: Running, bytes: Uint8Array): Buffer | null {
  const refuse = (): null => {
    running.refused += 1;
    return null;
  };
  const reading = readMessage(senseSchema, bytes);
  if (!reading.ok || running.state === null) return refuse();
  const sense: Sense = reading.value;
  if (sense.tick === running.lastTick) return Buffer.from(running.lastSteer);
  if (sense.tick < running.lastTick) return refuse();
  const steer = normalise(step(running.state, sense));
  running.lastTick = sense.tick;
  running.lastSteer = writeMessage(steer);
  running.agentState = steer.state;
  return Buffer.from(running.lastSteer);
}

/** Nagle's algorithm off: it would hold every steer back for a delayed acknowledgement. */
function noDelay(client: MqttClient): void {
  const stream = client.stream as { setNoDelay?: (on: boolean) => void };
  stream.setNoDelay?.(true);
}
