/** The sea's own messages. Agents never see truth. */
import { z } from 'zod';
import { componentMps, depthM, eastM, headingDeg, name, northM, ratio, speedMps, tick } from './fields.ts';

export const seaTickSchema = z
  .strictObject({
    tick,
    time_s: z.number().min(0).max(1e7).describe("true time from the trial's start"),
    phase: z.enum(['running', 'ended', 'failed']).describe('agents end when the sea does'),
  })
  .describe('where the run is; low rate, and at its end');

export const truthSchema = z
  .strictObject({
    tick,
    vehicles: z
      .array(
        z.strictObject({
          name,
          east_m: eastM,
          north_m: northM,
          depth_m: depthM,
          heading_deg: headingDeg,
          speed_mps: speedMps,
          currentEast_mps: componentMps,
          currentNorth_mps: componentMps,
          battery: ratio,
        }),
      )
      .min(1)
      .max(16),
  })
  .describe('the true state of every vehicle; low rate');

export const outcomeNoticeSchema = z
  .strictObject({
    title: z.string().max(200),
    verdict: z.enum(['pass', 'fail']),
    digest: z.string().regex(/^[0-9a-f]{64}$/),
  })
  .describe('retained until the bench ends');

export type SeaTick = z.infer<typeof seaTickSchema>;
export type TruthMessage = z.infer<typeof truthSchema>;
export type OutcomeNotice = z.infer<typeof outcomeNoticeSchema>;
