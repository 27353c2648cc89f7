/**
 * The agent's own settings: one table, from which come the mission's `onboard` section (numbers with
 * the unit in the name) and the trial's (quantities with units). Nothing else has defaults for them.
 */
import { z } from 'zod';

/** Unit of a setting, as its suffix in messages. */
export type SettingUnit = 's' | 'm' | 'mps' | 'deg' | 'share' | 'count';

export interface Setting {
  readonly unit: SettingUnit;
  readonly default: number;
  readonly min: number;
  readonly max: number;
  readonly says: string;
}

export const SETTINGS = {
  // Holding the line and the place on it.
  converge: {
    unit: 'm',
    default: 30,
    min: 2,
    max: 500,
    says: 'a cross-track error this large is steered out at 45°, smaller ones less steeply',
  },
  placeTime: {
    unit: 's',
    default: 100,
    min: 5,
    max: 3600,
    says: 'time in which a lag behind the own place is made up by speed',
  },
  speedCorrection: {
    unit: 'mps',
    default: 0.35,
    min: 0,
    max: 5,
    says: 'greatest correction of the speed along the loop',
  },
  patternFollow: {
    unit: 's',
    default: 300,
    min: 10,
    max: 36_000,
    says: 'time in which the pattern of places follows what the fleet shows',
  },
  commonSpeedTime: {
    unit: 's',
    default: 600,
    min: 60,
    max: 36_000,
    says: 'time in which the common speed along the loop follows the currents',
  },
  peerSilence: {
    unit: 's',
    default: 600,
    min: 10,
    max: 36_000,
    says: 'a peer that was not heard for so long no longer counts',
  },
  takeHold: {
    unit: 'm',
    default: 60,
    min: 5,
    max: 500,
    says: 'joining ends within this cross-track, and twice it along the loop',
  },
  letGo: { unit: 'm', default: 200, min: 10, max: 5000, says: 'holding ends beyond this cross-track' },
  batteryReserve: {
    unit: 'share',
    default: 0.15,
    min: 0,
    max: 0.9,
    says: 'charge kept back when the way home is reckoned',
  },
  // The current map and the own sensors.
  tidePeriod: {
    unit: 's',
    default: 44_714.16,
    min: 600,
    max: 1e6,
    says: 'period of the tide that the map knows of; M2 is 12.4206 h',
  },
  uniformSigma: {
    unit: 'mps',
    default: 0.15,
    min: 0.001,
    max: 3,
    says: 'prior sd of the steady mean current, per component',
  },
  tideSigma: { unit: 'mps', default: 0.15, min: 0.001, max: 3, says: 'prior sd of each tidal coefficient' },
  mapSigma: {
    unit: 'mps',
    default: 0.13,
    min: 0.001,
    max: 3,
    says: 'prior sd of what is left, per component',
  },
  mapLength: { unit: 'm', default: 600, min: 20, max: 1e5, says: 'length over which what is left changes' },
  mapTime: { unit: 's', default: 18_000, min: 60, max: 1e7, says: 'time over which what is left changes' },
  mapModes: { unit: 'count', default: 16, min: 4, max: 48, says: 'number of modes of the map' },
  noteSigma: {
    unit: 'mps',
    default: 0.002,
    min: 0.0001,
    max: 1,
    says: 'white error of a note, per component, beside its fixes',
  },
  compassDrift: {
    unit: 'deg',
    default: 0.1,
    min: 0,
    max: 30,
    says: 'growth of the compass bias, sd after an hour',
  },
  logDrift: {
    unit: 'share',
    default: 0.001,
    min: 0,
    max: 0.5,
    says: 'growth of the log scale error, sd after an hour',
  },
  surprise: {
    unit: 'count',
    default: 22,
    min: 5,
    max: 1_000_000,
    says: 'summed misfit of notes beyond which water, compass and log are held to have changed',
  },
  startSigma: {
    unit: 'm',
    default: 10,
    min: 0.1,
    max: 1e4,
    says: 'sd per axis of the start place, until the first fix',
  },
  fixGate: {
    unit: 'count',
    default: 5,
    min: 2,
    max: 100,
    says: 'a fix further off than so many standard deviations is left out',
  },
  noteLeast: {
    unit: 's',
    default: 60,
    min: 1,
    max: 2000,
    says: 'fixes closer together than this make no note and move no anchor',
  },
  noteMost: { unit: 's', default: 2040, min: 2, max: 2047, says: 'a longer way between fixes makes no note' },
  // What the agent calls stale or uncertain, in frames and to its own steering.
  mapStale: {
    unit: 'mps',
    default: 0.15,
    min: 0.01,
    max: 2,
    says: 'stated sd of the current at the own place above which the map counts as stale',
  },
  positionUncertain: {
    unit: 'm',
    default: 40,
    min: 1,
    max: 1000,
    says: 'stated sd of the own position above which it counts as uncertain',
  },
} as const satisfies Record<string, Setting>;

export type SettingKey = keyof typeof SETTINGS;

type Suffixed<K extends SettingKey> = (typeof SETTINGS)[K]['unit'] extends 'share' | 'count'
  ? K
  : `${K}_${(typeof SETTINGS)[K]['unit']}`;

/** Settings as the core reads them: `lookAhead_s`, …; shares and counts carry no suffix. */
export type Settings = { readonly [K in SettingKey as Suffixed<K>]: number };

function settingOf(key: SettingKey): Setting {
  return SETTINGS[key];
}

/** The message name of a setting. */
export function settingName(key: SettingKey): string {
  const { unit } = settingOf(key);
  return unit === 'share' || unit === 'count' ? key : `${key}_${unit}`;
}

const shape: Record<string, z.ZodType<number>> = {};
for (const key of Object.keys(SETTINGS) as SettingKey[]) {
  const { min, max, says, unit } = settingOf(key);
  const number = unit === 'count' ? z.int() : z.number();
  shape[settingName(key)] = number.min(min).max(max).describe(says);
}

/** The `onboard` section of the mission message; every setting is present. */
export const settingsSchema = z.strictObject(shape) as unknown as z.ZodType<Settings>;

/** Every setting at its default. */
export function defaultSettings(): Settings {
  const values: Record<string, number> = {};
  for (const key of Object.keys(SETTINGS) as SettingKey[]) {
    values[settingName(key)] = SETTINGS[key].default;
  }
  return values as Settings;
}
