/**
 * A run with no sea and no agents: vehicles whose places, beliefs and maps are given as plain functions
 * of time, so that every measure of it can be worked out by hand.
 */
import type { TickRecord } from '../../hil-sim/run/record.ts';
import type { Hearing, Truth } from '../../hil-sim/sea/sea.ts';
import { trialSchema, type Trial } from '../../hil-sim/trial/schema.ts';
import type { Sense } from '../../messages/sense.ts';
import type { MapMessage, Steer } from '../../messages/steer.ts';

export const NAMES = ['amber', 'cobalt', 'jade', 'ochre', 'umber', 'indigo', 'slate', 'coral'];

/** A trial of `fleetSize` vehicles on a ring of 600 m about the datum; sections may be replaced. */
export function trialOf(fleetSize: number, change: Record<string, unknown> = {}): Trial {
  return trialSchema.parse({
    title: 'Synthetic ring',
    seed: 41,
    duration: '1 h',
    datum: { lat: 58.4021, lon: -9.531 },
    mission: missionOf(),
    fleet: {
      vehicles: NAMES.slice(0, fleetSize).map((name, index) => ({
        name,
        start: { east: '-900 m', north: `${150 - 90 * index} m`, heading: '40 deg' },
      })),
    },
    water: { currents: [] },
    limits: {},
    ...change,
  });
}

export function missionOf(change: Record<string, unknown> = {}): Record<string, unknown> {
  return {
    loop: { shape: 'circle', centre: { east: '0 m', north: '0 m' }, radius: '600 m', turn: 'clockwise' },
    keepIn: { shape: 'circle', centre: { east: '0 m', north: '0 m' }, radius: '2000 m' },
    recovery: { east: '-1500 m', north: '0 m' },
    ...change,
  };
}

/** One vehicle at one moment, as far as the measures care. */
export interface Moment {
  readonly eastM: number;
  readonly northM: number;
  readonly depthM?: number;
  readonly speedMps?: number;
  readonly headingRad?: number;
  readonly current?: readonly [number, number];
  readonly believedCurrent?: readonly [number, number];
  readonly believedOff?: readonly [number, number];
  readonly energyJ?: number;
  readonly battery?: number;
  readonly map?: MapMessage | null;
  readonly state?: Steer['state'];
}

/** On the ring of `radiusM` about the datum, at a phase (turns, clockwise from north). */
export function onRing(radiusM: number, phase: number): { eastM: number; northM: number } {
  return { eastM: radiusM * Math.sin(2 * Math.PI * phase), northM: radiusM * Math.cos(2 * Math.PI * phase) };
}

/** A map that says one current at all points. */
export function flatMap(east: number, north: number, sigma = 0.05): MapMessage {
  const column = (value: number): number[] => new Array<number>(64).fill(value);
  return { east_mps: column(east), north_mps: column(north), sigma_mps: column(sigma) };
}

/** The record of one tick from its moments, by fleet index. */
export function recordOf(
  tick: number,
  moments: readonly Moment[],
  more: { tickS?: number; hearings?: readonly Hearing[] } = {},
): TickRecord {
  const column = (of: (moment: Moment) => number): Float64Array => Float64Array.from(moments, of);
  const truth: Truth = {
    eastM: column((at) => at.eastM),
    northM: column((at) => at.northM),
    depthM: column((at) => at.depthM ?? 40),
    headingRad: column((at) => at.headingRad ?? 0),
    speedMps: column((at) => at.speedMps ?? 1.2),
    currentEastMps: column((at) => at.current?.[0] ?? 0),
    currentNorthMps: column((at) => at.current?.[1] ?? 0),
    battery: column((at) => at.battery ?? 1),
    energyJ: column((at) => at.energyJ ?? 0),
    compassBiasRad: column(() => 0.0123456789),
    logScale: column(() => 0.01),
  };
  const tickS = more.tickS ?? 1;
  return {
    tick,
    timeS: tick * tickS,
    truth,
    senses: moments.map((moment) => senseOf(tick, tickS, moment)),
    steers: moments.map((moment) => steerOf(tick, moment)),
    changes: [],
    hearings: more.hearings ?? [],
  };
}

function senseOf(tick: number, tickS: number, moment: Moment): Sense {
  return {
    tick,
    at_s: tick * tickS,
    heading_deg: 359.99 * Math.abs(Math.sin(tick)),
    speed_mps: 1.2 + 0.02 * Math.sin(tick * 7),
    depth_m: moment.depthM ?? 40,
    battery: moment.battery ?? 1,
    fix: null,
    heard: [],
    orders: [],
  };
}

function steerOf(tick: number, moment: Moment): Steer {
  return {
    tick,
    heading_deg: 359.99 * Math.abs(Math.cos(tick)),
    speed_mps: 1.2 + 0.1 * Math.sin(tick / 9),
    depth_m: 40,
    say: null,
    state: moment.state ?? 'holding',
    reasons: ['on-the-loop'],
    heard: [],
    estimate: {
      east_m: moment.eastM + (moment.believedOff?.[0] ?? 0),
      north_m: moment.northM + (moment.believedOff?.[1] ?? 0),
      varEast_m2: 12.3 + Math.sin(tick),
      covEastNorth_m2: 0.1 * Math.cos(tick),
      varNorth_m2: 11.1 + Math.sin(tick / 3),
      currentEast_mps: moment.believedCurrent?.[0] ?? 0,
      currentNorth_mps: moment.believedCurrent?.[1] ?? 0,
      varCurrentEast_m2ps2: 0.0025 + 1e-4 * Math.sin(tick),
      covCurrentEastNorth_m2ps2: 1e-5 * Math.sin(tick / 2),
      varCurrentNorth_m2ps2: 0.0025 + 1e-4 * Math.cos(tick),
      phase: 0.123456789,
      compassBias_deg: 0.5 * Math.sin(tick / 100),
      compassBiasSigma_deg: 0.31 + 0.01 * Math.sin(tick / 50),
      logScale: 0.01 * Math.sin(tick / 70),
      logScaleSigma: 0.0081,
      notesHeld: Math.floor(tick / 60),
    },
    map: moment.map ?? null,
  };
}

/** Still water. */
export const still = (_eastM: number, _northM: number, _timeS: number, out: Float64Array): void => {
  out[0] = 0;
  out[1] = 0;
};

/** Water that flows one way everywhere. */
export const flowing =
  (east: number, north: number) =>
  (_eastM: number, _northM: number, _timeS: number, out: Float64Array): void => {
    out[0] = east;
    out[1] = north;
  };
