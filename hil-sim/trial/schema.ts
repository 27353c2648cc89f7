/**
 * The trial file: its keys, ranges, defaults and descriptions, and the only place that has them.
 *
 * Decoding turns text with units into SI numbers (metres, seconds, m/s, radians, joules, shares of
 * one) under the file's own key names; encoding turns them back, so that `trial.yaml` in a run folder
 * repeats the run. Relations between keys are checked in `checks.ts`; what DESIGN names and is not
 * built yet is refused in `not-built.ts`.
 */
import { z } from 'zod';
import { radFromDeg } from '../../messages/angles.ts';
import { name } from '../../messages/fields.ts';
import { FLEET_MAX, NOTE_END_MAX_S } from '../../messages/frame.ts';
import { SETTINGS, type Setting, type SettingKey } from '../../messages/settings.ts';
import { formatQuantity } from '../../messages/units.ts';
import { faultSchema, orderSchema } from './fault-schema.ts';
import { quantity, type Quantity } from './quantity.ts';

const length = (min?: number, max?: number) => quantity('length', { min: min ?? -1e6, max: max ?? 1e6 });
const positiveLength = quantity('length', { above: 0, max: 1e6 });
const speed = quantity('speed', { min: 0, max: 50 });
/** What a vehicle of this kind can do at most; the mission message has the same bounds. */
const ownSpeed = quantity('speed', { min: 0, max: 20 });
const positiveSpeed = quantity('speed', { above: 0, max: 20 });
const angle = quantity('angle', { min: -2 * Math.PI, max: 2 * Math.PI });
/** A standard deviation of an angle. */
const spread = quantity('angle', { min: 0, max: Math.PI });
const positiveTime = quantity('time', { above: 0, max: 1e7 });
const share = quantity('share', { min: 0, max: 1 });
const power = quantity('power', { min: 0, max: 1e5 });

const place = z.strictObject({ east: length(), north: length() });
const turn = z.enum(['clockwise', 'anticlockwise']);

const circle = z.strictObject({ shape: z.literal('circle'), centre: place, radius: positiveLength });
const loop = circle.extend({ turn });

const missionSchema = z.strictObject({
  loop,
  spacing: z
    .union([z.literal('even'), z.array(z.number().min(0).lt(1)).min(1).max(FLEET_MAX)])
    .default('even')
    .describe('even, or a list of offsets in turns, 0 up to 1, one per vehicle'),
  depth: length(0, 6000).prefault('40 m').describe('depth of the loop'),
  sharing: z.enum(['notes', 'solo']).default('notes'),
  keepIn: circle,
  keepOut: z.array(circle).max(64).default([]),
  recovery: place,
  formedUp: z
    .strictObject({
      crossTrack: positiveLength.prefault('75 m'),
      gap: quantity('share', { above: 0, max: 1 }).prefault('30 %'),
      hold: positiveTime.prefault('10 min'),
    })
    .prefault({})
    .describe('when the fleet counts as formed up; no limit depends on it'),
});

const vehicleParts = {
  speed: z.strictObject({
    cruise: positiveSpeed, min: ownSpeed, max: positiveSpeed,
    lag: quantity('time', { min: 0, max: 600 }),
  }),
  turnRate: quantity('angleRate', { above: 0, max: Math.PI }),
  climb: quantity('speed', { above: 0, max: 10 }),
  battery: quantity('energy', { above: 0, max: 1e10 }),
  power: z.strictObject({ hotel: power, cruise: power }),
  clock: z.strictObject({
    offset: quantity('time', { min: -3600, max: 3600 }),
    drift: quantity('clockDrift', { min: -1e-3, max: 1e-3 }),
  }),
  fix: z.strictObject({
    from: z.enum(['baseline', 'surface']),
    every: quantity('time', { above: 0, max: 1e6 }),
    sigma: quantity('length', { above: 0, max: 1e4 }),
    latency: quantity('time', { min: 0, max: 60 }),
    outlier: z.strictObject({ share, sigma: positiveLength }),
  }),
  compass: z.strictObject({
    bias: spread, sigma: spread,
    biasIs: angle.optional().describe('the bias itself, in place of a draw'),
  }),
  log: z.strictObject({
    scale: share, sigma: speed,
    scaleIs: quantity('share', { min: -0.5, max: 0.5 }).optional().describe('the scale error itself'),
  }),
};

/** Defaults of a vehicle: a small propeller vehicle, common practice. */
const eachSchema = z.strictObject({
  speed: z.strictObject({
    cruise: vehicleParts.speed.shape.cruise.prefault('1.2 m/s'),
    min: vehicleParts.speed.shape.min.prefault('0.5 m/s'),
    max: vehicleParts.speed.shape.max.prefault('1.6 m/s'),
    lag: vehicleParts.speed.shape.lag.prefault('5 s'),
  }).prefault({}),
  turnRate: vehicleParts.turnRate.prefault('5 deg/s'),
  climb: vehicleParts.climb.prefault('0.3 m/s'),
  battery: vehicleParts.battery.prefault('2 kWh'),
  power: z.strictObject({
    hotel: vehicleParts.power.shape.hotel.prefault('30 W'),
    cruise: vehicleParts.power.shape.cruise.prefault('60 W'),
  }).prefault({}),
  clock: z.strictObject({
    offset: vehicleParts.clock.shape.offset.prefault('0 s'),
    drift: vehicleParts.clock.shape.drift.prefault('0 ppm'),
  }).prefault({}),
  fix: z.strictObject({
    from: vehicleParts.fix.shape.from.default('baseline'),
    every: vehicleParts.fix.shape.every.prefault('5 min'),
    sigma: vehicleParts.fix.shape.sigma.prefault('5 m'),
    latency: vehicleParts.fix.shape.latency.prefault('0 s'),
    outlier: z.strictObject({
      share: share.prefault('0 %'), sigma: positiveLength.prefault('60 m'),
    }).prefault({}),
  }).prefault({}),
  compass: z.strictObject({
    bias: spread.prefault('1 deg'), sigma: spread.prefault('0.5 deg'),
    biasIs: vehicleParts.compass.shape.biasIs,
  }).prefault({}),
  log: z.strictObject({
    scale: share.prefault('1 %'), sigma: speed.prefault('0.02 m/s'),
    scaleIs: vehicleParts.log.shape.scaleIs,
  }).prefault({}),
});

const vehicleSchema = z.strictObject({
  name,
  start: z.strictObject({
    east: length(), north: length(), depth: length(0, 6000).prefault('0 m'), heading: angle.prefault('0 deg'),
  }),
  speed: vehicleParts.speed.partial().optional(),
  turnRate: vehicleParts.turnRate.optional(),
  climb: vehicleParts.climb.optional(),
  battery: vehicleParts.battery.optional(),
  power: vehicleParts.power.partial().optional(),
  clock: vehicleParts.clock.partial().optional(),
  fix: vehicleParts.fix.extend({ outlier: vehicleParts.fix.shape.outlier.partial() }).partial().optional(),
  compass: vehicleParts.compass.partial().optional(),
  log: vehicleParts.log.partial().optional(),
});

const fleetSchema = z.strictObject({
  vehicles: z.array(vehicleSchema).min(1).max(FLEET_MAX),
  each: eachSchema.prefault({}),
});

const currentSchema = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('uniform'), set: angle, drift: speed }),
  z.strictObject({
    kind: z.literal('tide'), period: positiveTime, major: speed,
    minor: quantity('speed', { min: -50, max: 50 }).prefault('0 m/s'),
    bearing: angle, phase: angle.prefault('0 deg'),
  }),
  z.strictObject({
    kind: z.literal('eddy'), centre: place, radius: positiveLength, peak: speed, turn,
    moving: z.strictObject({ set: angle, drift: speed }).optional(),
  }),
  z.strictObject({
    kind: z.literal('shear'), bearing: angle, gradient: quantity('speed', { min: -50, max: 50 }),
    over: positiveLength,
  }),
]);

const waterSchema = z.strictObject({
  currents: z.array(currentSchema).max(32).default([]),
  temperature: quantity('temperature', { min: -2, max: 40 }).prefault('10 degC'),
  salinity: z.number().min(0).max(45).default(35).describe('practical salinity, no unit'),
  wind: speed.prefault('5 m/s'),
  bottom: positiveLength.prefault('200 m'),
});

const modemSchema = z.strictObject({
  carrier: quantity('frequency', { above: 0, max: 1e6 }).prefault('25 kHz'),
  bandwidth: quantity('frequency', { above: 0, max: 1e6 }).prefault('4 kHz'),
  bitRate: quantity('bitRate', { above: 0, max: 1e6 }).prefault('640 bit/s'),
  sourceLevel: quantity('level', { min: 0, max: 250 }).prefault('175 dB'),
  frame: quantity('size', { min: 32, max: 256 }).prefault('32 B'),
  slot: quantity('time', { above: 0, max: 600 }).prefault('4 s'),
  turnOn: quantity('time', { min: 0, max: 60 }).prefault('0.2 s'),
  guard: quantity('time', { min: 0, max: 60 }).prefault('0.05 s'),
  physics: z.enum(['off']).default('off'),
  link: z.strictObject({
    loss: share.prefault('0 %'),
    burst: z.number().min(1).max(1000).default(1).describe('mean run of lost frames; 1 is independent'),
    delay: quantity('time', { min: 0, max: 600 }).prefault('0 s'),
    jitter: quantity('time', { min: 0, max: 600 }).prefault('0 s').describe('standard deviation'),
    repeat: share.prefault('0 %'),
    garble: share.prefault('0 %'),
  }).prefault({}),
});

const SETTING_DIMENSION = { s: 'time', m: 'length', mps: 'speed', deg: 'angle', share: 'share' } as const;

/** A setting of the agent: the table's numbers are in message units, of which only degrees are not SI. */
function settingSchema(setting: Setting): z.ZodType {
  const { unit, min, max, says } = setting;
  if (unit === 'count') return z.int().min(min).max(max).default(setting.default).describe(says);
  const si = (value: number): number => (unit === 'deg' ? radFromDeg(value) : value);
  const dimension = SETTING_DIMENSION[unit];
  return quantity(dimension, { min: si(min), max: si(max) })
    .prefault(formatQuantity(si(setting.default), dimension))
    .describe(says);
}

const onboardShape: Record<string, z.ZodType> = {};
for (const key of Object.keys(SETTINGS) as SettingKey[]) onboardShape[key] = settingSchema(SETTINGS[key]);

/** Every measure that a limit may name; a name ending in `Min` must be at least the value. */
export const LIMIT_DIMENSIONS = {
  formUpWithin: 'time', crossTrackRms: 'length', crossTrackMax: 'length', gapRms: 'share',
  separationMin: 'length', currentRms: 'speed', mapRms: 'speed', mapSpread: 'speed',
  positionRms: 'length', deliveryRatioMin: 'share', energy: 'energy',
} as const;

const limitShape: Record<string, z.ZodType> = {};
for (const [key, dimension] of Object.entries(LIMIT_DIMENSIONS)) {
  limitShape[key] = quantity(dimension, dimension === 'share' && key.endsWith('Min')
    ? { min: 0, max: 1 } : { min: 0 }).optional();
}

const limitsSchema = z.strictObject({
  ...(limitShape as { [K in keyof typeof LIMIT_DIMENSIONS]: z.ZodOptional<Quantity> }),
  lateTicks: z.int().min(0).optional(),
  except: z.array(name).optional().describe('vehicles taken out of the loop measures'),
});

export const trialSchema = z.strictObject({
  title: z.string().min(1).max(200),
  seed: z.int().min(0).max(2 ** 32 - 1).default(1),
  start: z.string().regex(/^\d{4}-\d\d-\d\dT\d\d:\d\d(:\d\d)?Z$/)
    .describe('the time of tick 0, like 2027-05-01T06:00Z').optional(),
  duration: quantity('time', { above: 0, max: NOTE_END_MAX_S }),
  tick: quantity('time', { above: 0, max: 10 }).prefault('1 s'),
  datum: z.strictObject({
    lat: z.number().min(-89).max(89).describe('degrees north'),
    lon: z.number().min(-180).max(180).describe('degrees east'),
  }),
  mission: missionSchema,
  fleet: fleetSchema,
  onboard: z.strictObject(onboardShape).prefault({}),
  water: waterSchema,
  modem: modemSchema.prefault({}),
  faults: z.array(faultSchema).max(1000).default([]),
  orders: z.array(orderSchema).max(1000).default([]),
  limits: limitsSchema.prefault({}),
});

/** A checked trial: the file's keys, every default filled in, SI numbers and radians. */
export type Trial = z.infer<typeof trialSchema>;
export type TrialVehicle = Trial['fleet']['vehicles'][number];
export type TrialCurrent = Trial['water']['currents'][number];
export type TrialLimits = Trial['limits'];
