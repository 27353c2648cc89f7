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
  /** Resolves when every one of these vehicles has said `ready`; rejects with AgentTrouble. */
  expect(vehicles: readonly string[]): Promise<void>;
  fail(trouble: AgentTrouble): void;
  close(): void;
}

/** One call of `expect` that is not yet met. */
interface Expecting {
  readonly missing: Set<string>;
  readonly timer: NodeJS.Timeout;
  readonly resolve: () => void;
  readonly reject: (trouble: AgentTrouble) => void;
}

/** Starts to listen; statuses count from here on. */
export async function watchStatuses(options: ReadinessOptions): Promise<Readiness> {
  const { bus, bench, vehicles, leave, lockstep } = options;
  const expecting = new Set<Expecting>();
  let isOver = false;
  const settle = (one: Expecting): void => {
    clearTimeout(one.timer);
    expecting.delete(one);
  };
  const fail = (trouble: AgentTrouble): void => {
    for (const one of [...expecting]) {
      settle(one);
      one.reject(trouble);
    }
  };
  const hear = (vehicle: string, { phase, reason }: Status): void => {
    if (phase === 'failed') {
      const why = `the agent of ${vehicle} failed: ${reason ?? 'it did not say why'}`;
      fail(new AgentTrouble(vehicle, why));
      lockstep.fail(why, vehicle);
    }
    if (phase !== 'ready') return;
    const one = [...expecting].find(({ missing }) => missing.has(vehicle));
    if (one === undefined) {
      if (lockstep.lastTick() < 0) return;
      lockstep.fail(`a second agent of ${vehicle} has joined in the middle of the run`, vehicle);
      return;
    }
    one.missing.delete(vehicle);
    if (one.missing.size > 0) return;
    settle(one);
    one.resolve();
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
    fail,
    expect: (wanted) => new Promise((resolve, reject) => {
      const missing = new Set(wanted);
      const timer = setTimeout(() => {
        const late = wanted.find((vehicle) => missing.has(vehicle) && !leave.includes(vehicle));
        if (late === undefined) return;
        fail(new AgentTrouble(late, `the agent of ${late} did not say that it is ready within ${READY_MS / 1000} s`));
      }, READY_MS);
      expecting.add({ missing, timer, resolve, reject });
    }),
    close() {
      isOver = true;
      for (const one of [...expecting]) settle(one);
    },
  };
}
