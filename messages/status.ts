/** An agent's low-rate retained summary; its last will is the same message with `phase: gone`. */
import { z } from 'zod';
import { name } from './fields.ts';
import { AGENT_STATES } from './frame.ts';

export const statusSchema = z
  .strictObject({
    vehicle: name,
    phase: z.enum(['ready', 'running', 'ended', 'failed', 'gone']).describe('ready: mission read, no sense yet'),
    tick: z.int().min(-1).max(10_000_000).describe('last tick answered, -1 before the first'),
    state: z.enum(AGENT_STATES).nullable(),
    refused: z.int().min(0).describe('messages refused since the start: garbled, foreign or out of order'),
    reason: z.string().max(500).nullable().describe('why it failed, if it did'),
  })
  .describe('retained; low rate');

export type Status = z.infer<typeof statusSchema>;
