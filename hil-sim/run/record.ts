/** One tick as the bench sees it: what was perceived, what was answered, and the truth of that tick. */
import type { Sense } from '../../messages/sense.ts';
import type { Steer } from '../../messages/steer.ts';
import type { Change } from '../sea/faults.ts';
import type { Hearing, Truth } from '../sea/sea.ts';

/** Valid only until the next tick: the truth's arrays are the sea's own. */
export interface TickRecord {
  readonly tick: number;
  /** True time of the tick, seconds from the trial's start. */
  readonly timeS: number;
  readonly truth: Truth;
  /** In fleet order; null where the agent is down by a scripted reboot, in both alike. */
  readonly senses: readonly (Sense | null)[];
  readonly steers: readonly (Steer | null)[];
  /** Faults and orders that took effect in this tick. */
  readonly changes: readonly Change[];
  /** Hearings that ended in this tick. */
  readonly hearings: readonly Hearing[];
}
