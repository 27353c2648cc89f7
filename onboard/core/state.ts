/** All that an agent remembers. Sized at start; written by `step` alone. */
import type { Mission } from '../../messages/mission.ts';

export interface State {
  readonly mission: Mission;
}

/** The state of an agent that has perceived nothing yet. */
export function start(mission: Mission): State {
  return { mission };
}
