/**
 * What an agent makes of the messages that reach it, without a socket: bytes in, bytes out. A message
 * that is garbled, foreign or out of order is refused and counted, and never reaches the core. Asked
 * again for the tick that it answered last, the agent gives the same steer.
 *
 * Ticks follow one another without a hole: the first sense may carry any tick (an agent can be started
 * again on the way), each later one the next; after a lost connection one hole is allowed, since a sea
 * that keeps time does not wait.
 */
import { readMessage, writeMessage } from '../messages/codec.ts';
import { fitsSense } from '../messages/fits.ts';
import { CHECKPOINT_S } from '../messages/memory.ts';
import { missionSchema, type Mission } from '../messages/mission.ts';
import { normalise } from '../messages/normalise.ts';
import { seaTickSchema } from '../messages/sea.ts';
import { senseSchema } from '../messages/sense.ts';
import type { Status } from '../messages/status.ts';
import { start, type State } from './core/state.ts';
import { step } from './core/step.ts';

/** Where an agent keeps its state for a start after a crash. */
export interface Memory {
  /** What was kept last, or null. */
  read(): State | null;
  keep(state: State): void;
}

export interface Answering {
  readonly vehicle: string;
  readonly memory: Memory | null;
  mission: Mission | null;
  state: State | null;
  lastTick: number;
  lastSteer: Uint8Array;
  /** Whether the next sense may leave ticks out. */
  mayJump: boolean;
  refused: number;
  agentState: Status['state'];
}

/** An agent that waits for its mission; with a memory it starts from what that holds, if anything. */
export function startAnswering(vehicle: string, memory: Memory | null = null): Answering {
  return {
    vehicle, memory, mission: null, state: null, lastTick: -1, lastSteer: new Uint8Array(0), mayJump: false, refused: 0,
    agentState: null,
  };
}

/**
 * Takes a mission and starts the agent; true if it did. A bench may put another mission in its place
 * until the first sense; from then on a different one is refused.
 */
export function takeMission(answering: Answering, bytes: Uint8Array): boolean {
  if (bytes.length === 0) return false; // a retained mission was cleared
  const reading = readMessage(missionSchema, bytes);
  if (!reading.ok || reading.value.vehicle !== answering.vehicle || !isOfFleet(reading.value)) {
    answering.refused += 1;
    return false;
  }
  if (JSON.stringify(reading.value) === JSON.stringify(answering.mission)) return false;
  if (answering.lastTick >= 0) {
    answering.refused += 1;
    return false;
  }
  answering.mission = reading.value;
  answering.state = answering.memory?.read() ?? start(reading.value);
  return true;
}

function isOfFleet(mission: Mission): boolean {
  return mission.fleet.some(({ name }) => name === mission.vehicle);
}

/** The steer for a sense's bytes, or null if they are refused. */
export function takeSense(answering: Answering, bytes: Uint8Array): Uint8Array | null {
  const reading = readMessage(senseSchema, bytes, fitsSense);
  if (!reading.ok || answering.state === null) return refuse(answering);
  const sense = reading.value;
  if (answering.lastTick >= 0) {
    if (sense.tick === answering.lastTick) return answering.lastSteer;
    if (sense.tick < answering.lastTick) return refuse(answering);
    if (sense.tick > answering.lastTick + 1 && !answering.mayJump) return refuse(answering);
  }
  answering.mayJump = false;
  const steer = normalise(step(answering.state, normalise(sense)));
  answering.lastTick = sense.tick;
  answering.lastSteer = writeMessage(steer);
  answering.agentState = steer.state;
  // Kept before the steer leaves: who has the steer may end this process at once.
  if ((sense.tick * answering.state.mission.tick_s) % CHECKPOINT_S === 0) answering.memory?.keep(answering.state);
  return answering.lastSteer;
}

function refuse(answering: Answering): null {
  answering.refused += 1;
  return null;
}

/** Whether a message of the sea says that the run is over. */
export function isRunOver(answering: Answering, bytes: Uint8Array): boolean {
  if (bytes.length === 0) return false;
  const reading = readMessage(seaTickSchema, bytes);
  if (!reading.ok) answering.refused += 1;
  return reading.ok && reading.value.phase !== 'running';
}

/** The summary to publish; the phase follows from what happened unless it is given. */
export function statusOf(answering: Answering, phase?: Status['phase'], reason: string | null = null): Status {
  const { vehicle, lastTick, agentState, refused } = answering;
  const now = phase ?? (lastTick < 0 ? 'ready' : 'running');
  return { vehicle, phase: now, tick: lastTick, state: agentState, refused, reason: reason?.slice(0, 500) ?? null };
}
