/** An agent's answer to one sense: what it orders, says, claims and believes. */
import { z } from 'zod';
import { componentMps, depthM, eastM, headingDeg, hexFrame, northM, speedMps, tick } from './fields.ts';
import { AGENT_STATES } from './frame.ts';
import { HEARD_MAX } from './sense.ts';

/** Phases at which a steer on a whole minute states the agent's map: 0/64 … 63/64. */
export const MAP_POINTS = 64;

/** Why an agent is in its state or in trouble; a closed list, text is made at the edge. */
export const REASONS = [
  'no-fix-yet', 'start', 'on-the-loop', 'off-the-loop', 'ordered', 'battery-low', 'current-too-strong',
  'position-uncertain', 'map-stale', 'alone', 'outside-keep-in', 'arrived', 'place-taken',
] as const;

/** What became of a frame that was heard: used, or why it was refused. */
export const HEARD_FATES = [
  'used', 'length', 'check', 'version', 'content', 'sender', 'own', 'repeat', 'time',
] as const;

const variance = z.number().min(0).max(1e12);

export const estimateSchema = z
  .strictObject({
    east_m: eastM,
    north_m: northM,
    varEast_m2: variance,
    covEastNorth_m2: z.number().min(-1e12).max(1e12),
    varNorth_m2: variance,
    currentEast_mps: componentMps.describe('the agent\'s current for its own place'),
    currentNorth_mps: componentMps,
    varCurrentEast_m2ps2: variance,
    covCurrentEastNorth_m2ps2: z.number().min(-1e12).max(1e12),
    varCurrentNorth_m2ps2: variance,
    phase: z.number().min(0).lt(1).describe('place on the loop in turns, by the agent\'s estimate'),
    compassBias_deg: z.number().min(-180).max(180),
    compassBiasSigma_deg: z.number().min(0).max(180),
    logScale: z.number().min(-1).max(1).describe('share by which the log reads too high'),
    logScaleSigma: z.number().min(0).max(1),
    notesHeld: z.int().min(0).max(100_000),
  })
  .describe('beliefs that the bench records and compares with the truth');

const mapColumn = z.array(componentMps).length(MAP_POINTS);

export const mapSchema = z
  .strictObject({ east_mps: mapColumn, north_mps: mapColumn, sigma_mps: mapColumn })
  .describe('current at phases 0/64 to 63/64 of the agent\'s own loop; sigma is of the vector\'s norm');

export const steerSchema = z
  .strictObject({
    tick: tick.describe('the tick of the sense that this answers'),
    heading_deg: headingDeg.describe('ordered heading by compass, degrees true'),
    speed_mps: speedMps.describe('ordered speed through the water'),
    depth_m: depthM.describe('ordered depth'),
    say: hexFrame.nullable().describe('a frame for the vehicle\'s next own slot'),
    state: z.enum(AGENT_STATES),
    reasons: z.array(z.enum(REASONS)).min(1).max(8),
    heard: z.array(z.enum(HEARD_FATES)).max(HEARD_MAX).describe('fate of each frame of the sense'),
    estimate: estimateSchema,
    map: mapSchema.nullable().describe('on whole minutes only'),
  })
  .describe('an agent\'s answer to one sense');

export type Steer = z.infer<typeof steerSchema>;
export type Estimate = z.infer<typeof estimateSchema>;
export type MapMessage = z.infer<typeof mapSchema>;
export type Reason = (typeof REASONS)[number];
export type HeardFate = (typeof HEARD_FATES)[number];
