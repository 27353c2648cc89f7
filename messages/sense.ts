/** What a vehicle perceives in one tick, and all that its agent gets to know of the sea. */
import { z } from 'zod';
import {
  componentMps, depthM, eastM, headingDeg, hexFrame, northM, onboardS, ratio, speedMps, tick,
} from './fields.ts';

export const ORDERS = ['hold', 'home', 'surface', 'resume'] as const;
export const HEARD_MAX = 64;

export const fixSchema = z
  .strictObject({
    at_s: onboardS.describe('when the position was true, on the vehicle\'s own clock'),
    east_m: eastM,
    north_m: northM,
    sigma_m: z.number().positive().max(1e4).describe('stated standard deviation per axis'),
  })
  .describe('a position measurement from outside the vehicle');

export const heardFrameSchema = z.strictObject({
  at_s: onboardS.describe('when its last bit arrived, on the vehicle\'s own clock'),
  bytes: hexFrame,
});

export const senseSchema = z
  .strictObject({
    tick,
    at_s: onboardS,
    heading_deg: headingDeg.describe('compass, degrees true; carries the compass error'),
    speed_mps: speedMps.describe('speed through the water by the log; carries its error'),
    depth_m: depthM,
    battery: ratio.describe('charge left, share of full'),
    fix: fixSchema.nullable(),
    heard: z.array(heardFrameSchema).max(HEARD_MAX).describe('frames heard since the last tick'),
    orders: z.array(z.enum(ORDERS)).max(8),
  })
  .describe('everything that a vehicle perceives in one tick');

/** Mean current over a note's track, as `aid` hands it on. */
export const currentSchema = z.strictObject({ east_mps: componentMps, north_mps: componentMps });

export type Sense = z.infer<typeof senseSchema>;
export type Fix = z.infer<typeof fixSchema>;
export type HeardFrame = z.infer<typeof heardFrameSchema>;
export type Order = (typeof ORDERS)[number];
