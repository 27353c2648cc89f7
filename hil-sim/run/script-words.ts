/** The script of a trial in words: each fault and order as a short phrase with its span. */
import { formatQuantity, type Dimension } from '../../messages/units.ts';
import type { TrialFault, TrialOrder } from '../trial/fault-schema.ts';
import type { Trial } from '../trial/schema.ts';

/** One line of the script. */
export interface ScriptLine {
  readonly fromS: number;
  /** Infinite to the end; equal to `fromS` for an order. */
  readonly untilS: number;
  /** A few words for a plot. */
  readonly short: string;
  /** All of it. */
  readonly words: string;
}

const DIMENSIONS: Record<string, Dimension> = {
  loss: 'share',
  repeat: 'share',
  garble: 'share',
  outliers: 'share',
  delay: 'time',
  jitter: 'time',
  bias: 'angle',
  set: 'angle',
  outlierSigma: 'length',
  scale: 'share',
};

function dimensionOf(fault: TrialFault, key: string): Dimension | null {
  if (key === 'step') return fault.kind === 'log' ? 'share' : 'angle';
  if (key === 'drift') return fault.kind === 'compass' ? 'angleDrift' : 'speed';
  return DIMENSIONS[key] ?? null;
}

const COMMON = ['at', 'for', 'kind', 'vehicle', 'from', 'to'];

/** "loss 80 %, burst 4": what a fault changes. */
function amounts(fault: TrialFault): string {
  return Object.entries(fault)
    .filter(([key, value]) => !COMMON.includes(key) && value !== undefined)
    .map(([key, value]) => {
      if (value === true) return key;
      const dimension = dimensionOf(fault, key);
      if (typeof value === 'number' && dimension !== null)
        return `${key} ${formatQuantity(value, dimension)}`;
      return typeof value === 'object' ? key : `${key} ${String(value)}`;
    })
    .join(', ');
}

function names(named: string | readonly string[] | undefined): string {
  if (named === undefined || named === 'all') return 'all';
  return typeof named === 'string' ? named : named.join(', ');
}

function whom(fault: TrialFault): string {
  if (fault.kind === 'current') return '';
  if (fault.kind !== 'link') return ` of ${names(fault.vehicle)}`;
  return fault.from === undefined && fault.to === undefined
    ? ''
    : ` from ${names(fault.from)} to ${names(fault.to)}`;
}

function faultLine(fault: TrialFault): ScriptLine {
  const words = `${fault.kind}${whom(fault)}: ${amounts(fault)}`;
  return {
    fromS: fault.at,
    untilS: fault.for === undefined ? Infinity : fault.at + fault.for,
    short: words,
    words,
  };
}

function orderLine({ at, vehicle, order }: TrialOrder): ScriptLine {
  return { fromS: at, untilS: at, short: `order ${order}`, words: `order to ${names(vehicle)}: ${order}` };
}

/** Faults, then orders, as they stand in the trial. */
export function scriptLines(trial: Trial): ScriptLine[] {
  return [...trial.faults.map(faultLine), ...trial.orders.map(orderLine)];
}

/** The faults that held at a time, in words. */
export function faultsAt(trial: Trial, timeS: number): string[] {
  return trial.faults
    .map(faultLine)
    .filter(({ fromS, untilS }) => fromS <= timeS && timeS < untilS)
    .map(({ words }) => words);
}
