/**
 * Who is ready: the bench listens to the agents' statuses, waits for every `ready` before the first tick,
 * and from then on takes a failed agent, or a second one that says it is ready, as the end of the run.
 */
import { readMessage } from '../../messages/codec.ts';
import { statusSchema, type Status } from '../../messages/status.ts';
import { everyVehicle, readTopic, vehicleTopic } from '../../messages/topics.ts';
import type { Bus } from './bus.ts';
import type { LockstepAgents } from './lockstep.ts';

const READY_MS = 20_000;

/** An agent that could not be started, or did not say that it is ready. */
export class AgentTrouble extends Error {
  override readonly name = 'AgentTrouble';
  constructor(readonly vehicle: string | null, message: string) {
    super(message);
  }
}

export interface ReadinessOptions {
  readonly bus: Bus;
  readonly bench: string;
  readonly vehicles: readonly string[];
  /** Foreign agents, which may take as long as they like. */
  readonly leave: readonly string[];
  readonly lockstep: LockstepAgents;
}

export interface Readiness {
  /** Resolves when every vehicle has said `ready`; rejects with AgentTrouble. */
  readonly all: Promise<void>;
  fail(trouble: AgentTrouble): void;
  close(): void;
}

/** Starts to listen; statuses count from here on. */
export async function watchStatuses(options: ReadinessOptions): Promise<Readiness> {
  const { bus, bench, vehicles, leave, lockstep } = options;
  const missing = new Set(vehicles);
  let succeed: () => void = () => undefined;
  let reject: (trouble: AgentTrouble) => void = () => undefined;
  let isOver = false;
  const all = new Promise<void>((resolve, rejectAll) => {
    succeed = resolve;
    reject = rejectAll;
  });
  all.catch(() => undefined); // whoever waits hears of it; nobody may wait yet
  const timer = setTimeout(() => {
    const late = vehicles.find((vehicle) => missing.has(vehicle) && !leave.includes(vehicle));
    if (late === undefined) return;
    reject(new AgentTrouble(late, `the agent of ${late} did not say that it is ready within ${READY_MS / 1000} s`));
  }, READY_MS);

  const hear = (vehicle: string, { phase, reason }: Status): void => {
    if (phase === 'failed') {
      const why = `the agent of ${vehicle} failed: ${reason ?? 'it did not say why'}`;
      reject(new AgentTrouble(vehicle, why));
      lockstep.fail(why, vehicle);
    }
    if (phase !== 'ready') return;
    if (lockstep.lastTick() >= 0) lockstep.fail(`a second agent of ${vehicle} has joined in the middle of the run`, vehicle);
    missing.delete(vehicle);
    if (missing.size > 0) return;
    clearTimeout(timer);
    succeed();
  };
  for (const vehicle of vehicles) {
    // A broker that outlives benches may still hold the words of agents long gone.
    bus.publish(vehicleTopic(bench, vehicle, 'status'), new Uint8Array(0), { retain: true });
  }
  await bus.subscribe(everyVehicle(bench, 'status'), (topic, bytes) => {
    const reading = readTopic(topic);
    const status = readMessage(statusSchema, bytes);
    if (isOver || reading?.of !== 'vehicle' || !vehicles.includes(reading.vehicle)) return;
    if (status.ok && status.value.vehicle === reading.vehicle) hear(reading.vehicle, status.value);
  });
  return {
    all,
    fail(trouble) {
      clearTimeout(timer);
      reject(trouble);
    },
    close() {
      isOver = true;
      clearTimeout(timer);
    },
  };
}
