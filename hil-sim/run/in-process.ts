/** The same two cores without sockets: the only place where the bench touches an agent's code. */
import { deserialize, serialize } from 'node:v8';
import { CHECKPOINT_S } from '../../messages/memory.ts';
import type { Mission } from '../../messages/mission.ts';
import { normalise } from '../../messages/normalise.ts';
import { start, type State } from '../../onboard/core/state.ts';
import { step } from '../../onboard/core/step.ts';
import type { Agents } from './run-trial.ts';

/** Agents that answer at once, one per mission, in fleet order; `keepsMemory` if a reboot may need it. */
export function inProcessAgents(missions: readonly Mission[], keepsMemory = false): Agents {
  const states: (State | null)[] = missions.map(start);
  const kept = new Array<Buffer | null>(missions.length).fill(null);
  return {
    answer: (senses) => senses.map((sense, index) => {
      const state = states[index];
      if (sense === null || state === null || state === undefined) return null;
      const steer = normalise(step(state, normalise(sense)));
      if (keepsMemory && (sense.tick * state.mission.tick_s) % CHECKPOINT_S === 0) kept[index] = serialize(state);
      return steer;
    }),
    restart(index, phase, memory) {
      const saved = kept[index] ?? null;
      if (phase === 'down') states[index] = null;
      else states[index] = memory === 'kept' && saved !== null ? deserialize(saved) as State : start(missions[index]!);
    },
    close: () => undefined,
  };
}
