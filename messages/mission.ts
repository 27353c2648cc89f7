/**
 * What one agent is told before it starts: the mission, the fleet's names and slots, its own settings
 * and the modem's timing. Nothing of the water, the faults or the limits.
 */
import { z } from 'zod';
import { depthM, headingDeg, name, place } from './fields.ts';
import { FLEET_MAX } from './frame.ts';
import { settingsSchema } from './settings.ts';
import { areaSchema, loopSchema } from './shape.ts';

export const SHARING = ['notes', 'solo'] as const;

const sigma = z.number().min(0).max(1e4);

/** A vehicle as its agent knows it: what it can do, and how good its sensors are said to be. */
export const selfSchema = z.strictObject({
  start: z.strictObject({ ...place.shape, depth_m: depthM, heading_deg: headingDeg }),
  cruise_mps: z.number().positive().max(20),
  speedMin_mps: z.number().min(0).max(20),
  speedMax_mps: z.number().positive().max(20),
  speedLag_s: z.number().min(0).max(600),
  turnRate_degps: z.number().positive().max(180),
  climb_mps: z.number().positive().max(10),
  battery_J: z.number().positive().max(1e10),
  powerHotel_W: z.number().min(0).max(1e5),
  powerCruise_W: z.number().min(0).max(1e5),
  fixFrom: z.enum(['baseline', 'surface']),
  fixEvery_s: z.number().positive().max(1e6),
  fixSigma_m: sigma,
  compassBiasSigma_deg: sigma.describe('standard deviation of the bias over vehicles; the bias itself is not told'),
  compassSigma_deg: sigma.describe('white noise, per tick'),
  logScaleSigma: sigma.describe('standard deviation of the scale error over vehicles, share of one'),
  logSigma_mps: sigma.describe('white noise, per tick'),
});

export const modemSchema = z.strictObject({
  frame_bytes: z.int().min(1).max(256),
  bitRate_bps: z.number().positive().max(1e6),
  slot_s: z.number().positive().max(600),
  turnOn_s: z.number().min(0).max(60),
  guard_s: z.number().min(0).max(60),
});

export const missionSchema = z
  .strictObject({
    vehicle: name,
    fleet: z
      .array(z.strictObject({ name, slot: z.int().min(0).max(FLEET_MAX - 1) }))
      .min(1)
      .max(FLEET_MAX)
      .describe('in fleet order; slot k is that of the k-th vehicle'),
    tick_s: z.number().positive().max(60),
    datum: z.strictObject({ lat_deg: z.number().min(-90).max(90), lon_deg: z.number().min(-180).max(180) }),
    loop: loopSchema,
    offsets: z
      .array(z.number().min(0).lt(1))
      .min(1)
      .max(FLEET_MAX)
      .describe('places in the pattern, in turns ahead of the first; who takes which is for the agents'),
    depth_m: depthM,
    sharing: z.enum(SHARING),
    keepIn: areaSchema,
    keepOut: z.array(areaSchema).max(64),
    recovery: place,
    self: selfSchema,
    modem: modemSchema,
    onboard: settingsSchema,
  })
  .describe('retained; to one agent');

export type Mission = z.infer<typeof missionSchema>;
export type SelfMessage = z.infer<typeof selfSchema>;
export type ModemMessage = z.infer<typeof modemSchema>;
export type Sharing = (typeof SHARING)[number];
