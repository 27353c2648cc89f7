/** Building blocks of the message schemas: each says its unit, its range and its frame of reference. */
import { z } from 'zod';

export const tick = z.int().min(0).max(10_000_000).describe('tick number, from 0');
export const name = z
  .string()
  .regex(/^(?!sea$)[a-z][a-z0-9-]{0,23}$/)
  .describe('lower-case letters, digits and hyphens; starts with a letter; 24 at most; not `sea`');
export const metres = z.number().min(-1e6).max(1e6);
export const eastM = metres.describe('metres east of the datum');
export const northM = metres.describe('metres north of the datum');
export const depthM = z.number().min(-10).max(12_000).describe('metres below the surface, down positive');
export const headingDeg = z.number().min(0).lt(360).describe('degrees true, clockwise from north');
export const speedMps = z.number().min(-50).max(50).describe('metres per second');
export const componentMps = z.number().min(-50).max(50);
export const onboardS = z.number().min(-1e7).max(1e7).describe('seconds on the vehicle\'s own clock');
export const ratio = z.number().min(0).max(1).describe('share of one');
export const hexFrame = z
  .string()
  .regex(/^(?:[0-9a-f]{2}){1,256}$/)
  .describe('the bytes of an acoustic frame in lower-case hex');
export const place = z.strictObject({ east_m: eastM, north_m: northM });
