/**
 * Closed lines on the water, as missions say them. Phase 0 lies due north of a circle's centre; phase
 * grows in the direction of travel.
 */
import { z } from 'zod';
import { place } from './fields.ts';

export const circleSchema = z.strictObject({
  shape: z.literal('circle'),
  centre: place,
  radius_m: z.number().positive().max(1e5).describe('metres'),
});

export const loopSchema = z.strictObject({
  ...circleSchema.shape,
  turn: z.enum(['clockwise', 'anticlockwise']).describe('direction of travel, seen from above'),
});

export const areaSchema = circleSchema;

export type LoopMessage = z.infer<typeof loopSchema>;
export type AreaMessage = z.infer<typeof areaSchema>;
