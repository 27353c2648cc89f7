/**
 * What a yardstick run adds to a sense, and no other run ever does: with `known` the true current at
 * the vehicle and, on whole minutes, along the loop; with `central` every note of the fleet at the tick
 * after it was made, unrounded. An agent's shell knows only senses without it.
 */
import { z } from 'zod';
import { componentMps } from './fields.ts';
import type { Note } from './frame.ts';
import { senseSchema } from './sense.ts';
import { MAP_POINTS } from './steer.ts';

const column = z.array(componentMps).length(MAP_POINTS);

export const knownAidSchema = z.strictObject({
  kind: z.literal('known'),
  east_mps: componentMps,
  north_mps: componentMps,
  loop: z.strictObject({ east_mps: column, north_mps: column }).nullable(),
});

export const centralAidSchema = z.strictObject({
  kind: z.literal('central'),
  notes: z.array(z.custom<Note>()),
});

export const aidedSenseSchema = senseSchema.extend({ aid: z.union([knownAidSchema, centralAidSchema]) });

export type Aid = z.infer<typeof knownAidSchema> | z.infer<typeof centralAidSchema>;
export type AidedSense = z.infer<typeof aidedSenseSchema>;
