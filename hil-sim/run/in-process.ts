/** The same two cores without sockets: the only place where the bench touches an agent's code. */
import type { Mission } from '../../messages/mission.ts';
import { normalise } from '../../messages/normalise.ts';
import { start } from '../../onboard/core/state.ts';
import { step } from '../../onboard/core/step.ts';
import type { Agents } from './run-trial.ts';

/** Agents that answer at once, one per mission, in fleet order. */
export function inProcessAgents(missions: readonly Mission[]): Agents {
  const states = missions.map(start);
  return {
    answer: (senses) => senses.map((sense, index) => normalise(step(states[index]!, normalise(sense)))),
    close: () => undefined,
  };
}
