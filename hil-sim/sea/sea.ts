/**
 * The face of the simulated sea: what the bench may ask of it. `advance.ts` implements it.
 *
 * One tick: `perceive` fills the senses of tick n; the agents answer; `advance` takes the steers of
 * tick n and moves everything to n + 1. Given the same plan and steers, everything is the same.
 */
import type { Sense } from '../../messages/sense.ts';
import type { Steer } from '../../messages/steer.ts';
import type { Change } from './faults.ts';

/** True state at the current tick, one entry per vehicle in fleet order; read-only to callers. */
export interface Truth {
  readonly eastM: Float64Array;
  readonly northM: Float64Array;
  readonly depthM: Float64Array;
  /** True heading, [0, 2π). */
  readonly headingRad: Float64Array;
  /** Speed through the water. */
  readonly speedMps: Float64Array;
  /** True current at the vehicle's place. */
  readonly currentEastMps: Float64Array;
  readonly currentNorthMps: Float64Array;
  /** Charge left, share of full. */
  readonly battery: Float64Array;
  /** Energy used since the start. */
  readonly energyJ: Float64Array;
  /** Errors as they are now, for the report and the estimator's checks. */
  readonly compassBiasRad: Float64Array;
  readonly logScale: Float64Array;
}

export const FRAME_FATES = [
  'heard', 'lost', 'collided', 'garbled', 'out-of-range', 'deaf', 'dropped-by-fault', 'refused',
] as const;
export type FrameFate = (typeof FRAME_FATES)[number];

/** The end of one frame at one hearer; a garbled frame still reaches the hearer's agent. */
export interface Hearing {
  readonly sentS: number;
  /** True time at which its last bit arrived; null if it never did. */
  readonly heardS: number | null;
  readonly fromIndex: number;
  readonly toIndex: number;
  readonly bytes: number;
  readonly fate: FrameFate;
}

/** A scripted reboot as it meets an agent. */
export interface Reboot {
  readonly index: number;
  readonly phase: 'down' | 'up';
  readonly memory: 'lost' | 'kept';
}

export interface Sea {
  readonly tick: number;
  readonly tickS: number;
  readonly truth: Truth;
  /** Senses of the current tick in fleet order; null for a vehicle whose agent is down by the script. */
  perceive(): readonly (Sense | null)[];
  /** Applies the steers of the current tick, null where the sense was, and moves to the next. */
  advance(steers: readonly (Steer | null)[]): void;
  /** Agents that go down or come up before this tick is perceived, in fleet order. */
  reboots(): readonly Reboot[];
  /** Faults and orders that take effect in this tick. */
  changes(): readonly Change[];
  /** Hearings that ended since the last call, ordered by time, sender, hearer. */
  takeHearings(): readonly Hearing[];
  /** The true current at any place and true time, written to `out` as east, north in m/s. */
  currentAt(eastM: number, northM: number, timeS: number, out: Float64Array): void;
  /** Count of frames said so far. */
  readonly framesSent: number;
}
