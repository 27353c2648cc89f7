/** Faults and orders of a trial file: the keys of each kind. */
import { z } from 'zod';
import { ORDERS } from '../../messages/sense.ts';
import { quantity, type Quantity } from './quantity.ts';

const TIME_MAX_S = 1e7;

const names = z.union([z.string(), z.array(z.string()).min(1)]).describe('a vehicle, or a list of them');
const at = quantity('time', { min: 0, max: TIME_MAX_S });
const span = {
  at,
  for: quantity('time', { above: 0, max: TIME_MAX_S }).optional().describe('absent: to the end'),
};
const vehicle = { vehicle: names.optional().describe('absent: all') };
const share = quantity('share', { min: 0, max: 1 });
const time = quantity('time', { min: 0, max: 600 });
const angle = quantity('angle', { min: -Math.PI, max: Math.PI });
const heading = quantity('angle', { min: -2 * Math.PI, max: 2 * Math.PI });
const ratio = quantity('share', { min: -0.5, max: 0.5 });
const speed = quantity('speed', { min: 0, max: 50 });
const length = quantity('length', { min: -1e6, max: 1e6 });

export const eddyKeys = {
  centre: z.strictObject({ east: length, north: length }),
  radius: quantity('length', { above: 0, max: 1e6 }),
  peak: speed,
  turn: z.enum(['clockwise', 'anticlockwise']),
  moving: z.strictObject({ set: heading, drift: speed }).optional(),
};

const optional = (of: Quantity) => of.optional();

export const faultSchema = z.discriminatedUnion('kind', [
  z.strictObject({
    kind: z.literal('link'), ...span, from: names.optional(), to: names.optional(),
    loss: optional(share), burst: z.number().min(1).max(1000).optional(),
    delay: optional(time), jitter: optional(time), repeat: optional(share), garble: optional(share),
  }),
  z.strictObject({
    kind: z.literal('compass'), ...span, ...vehicle,
    step: optional(angle).describe('added to the bias'),
    bias: optional(angle).describe('in place of the bias'),
    drift: quantity('angleDrift', { min: -1, max: 1 }).optional().describe('growth of the bias'),
  }),
  z.strictObject({
    kind: z.literal('log'), ...span, ...vehicle,
    step: optional(ratio).describe('added to the scale error'),
    scale: optional(ratio).describe('in its place'),
  }),
  z.strictObject({
    kind: z.literal('fix'), ...span, ...vehicle,
    outage: z.literal(true).optional(),
    jump: z.strictObject({ east: length, north: length }).optional(),
    outliers: optional(share),
    outlierSigma: quantity('length', { above: 0, max: 1e5 }).optional(),
  }),
  z.strictObject({
    kind: z.literal('reboot'), ...span, ...vehicle,
    memory: z.enum(['lost', 'kept']).default('lost'),
  }),
  z.strictObject({
    kind: z.literal('current'), ...span,
    set: optional(heading), drift: optional(speed),
    eddy: z.strictObject(eddyKeys).optional(),
  }),
]);

export const orderSchema = z.strictObject({
  at,
  vehicle: names.optional().describe('a vehicle, a list, or all'),
  order: z.enum(ORDERS),
});

export type TrialFault = z.infer<typeof faultSchema>;
export type TrialOrder = z.infer<typeof orderSchema>;

/** Of these keys of a kind exactly one must be there; the kinds that are not named take any. */
export const ONE_OF: Partial<Record<TrialFault['kind'], readonly string[]>> = {
  compass: ['step', 'bias', 'drift'],
  log: ['step', 'scale'],
  fix: ['outage', 'jump', 'outliers'],
  current: ['drift', 'eddy'],
};
/** Of these at least one. */
export const SOME_OF: Partial<Record<TrialFault['kind'], readonly string[]>> = {
  link: ['loss', 'burst', 'delay', 'jitter', 'repeat', 'garble'],
};
/** Keys that come together. */
export const TOGETHER: Partial<Record<TrialFault['kind'], readonly [string, string]>> = {
  fix: ['outliers', 'outlierSigma'],
  current: ['set', 'drift'],
};
