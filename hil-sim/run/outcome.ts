/** The outcome of a run: `outcome.json`, why it failed, and the sentence and table that a person reads. */
import { z } from 'zod';
import type { Trial } from '../trial/schema.ts';
import { clock, figure, marginFigure } from './figures.ts';
import { isLeast, judgeLimits, marginShare, verdictOf, type LimitResult } from './limits.ts';
import type { MeasureReport } from './measure-report.ts';
import { faultsAt } from './script-words.ts';
import { MEASURE_NAMES, type MeasureName, type MeasureValues } from './measures.ts';

const seconds = z.number().nullable();

const limitResultSchema = z.strictObject({
  name: z.string(),
  value: z.number().nullable(),
  limit: z.number(),
  unit: z.string(),
  met: z.boolean(),
  margin: z.number().nullable().describe('in the unit: room left if positive, what is lacking if negative'),
  worst: z.strictObject({ vehicle: z.string().nullable(), at_s: seconds, with: z.string().optional() }),
});

const measuresSchema = z.strictObject(
  Object.fromEntries(MEASURE_NAMES.map((name) => [name, z.number().nullable()])) as Record<
    MeasureName,
    z.ZodNullable<z.ZodNumber>
  >,
);

export const outcomeSchema = z.strictObject({
  title: z.string(),
  seed: z.int(),
  verdict: z.enum(['pass', 'fail']),
  limits: z.array(limitResultSchema),
  except: z.array(z.string()).optional().describe('vehicles taken out of the loop measures, if any'),
  measures: measuresSchema,
  why: z
    .strictObject({
      firstBreach: z.string(),
      at_s: seconds,
      faultsThen: z.array(z.string()),
      repeat: z.string(),
    })
    .optional(),
  yardsticks: z.strictObject({ central: measuresSchema, known: measuresSchema }).optional(),
  digest: z.string().regex(/^[0-9a-f]{64}$/),
  ticks: z.int(),
  wall_s: z.number(),
  version: z.string(),
  node: z.string(),
});

export type Outcome = z.infer<typeof outcomeSchema>;

export interface OutcomeInput {
  readonly trial: Trial;
  readonly report: MeasureReport;
  readonly digest: string;
  readonly ticks: number;
  readonly wall_s: number;
  readonly version: string;
  readonly node: string;
  /** The same seed with every note shared at once, and with the true current given. */
  readonly yardsticks?: { readonly central: MeasureValues; readonly known: MeasureValues };
  /** The command that runs the same again. */
  readonly repeat: string;
}

export function buildOutcome(input: OutcomeInput): Outcome {
  const { trial, report } = input;
  const limits = judgeLimits(trial.limits, report);
  const why = whyFailed(limits, input);
  return {
    title: trial.title,
    seed: trial.seed,
    verdict: verdictOf(limits),
    limits: limits.map((limit) => ({ ...limit, worst: { ...limit.worst } })),
    ...(report.excepted.length > 0 ? { except: [...report.excepted] } : {}),
    measures: { ...report.values },
    ...(why === null ? {} : { why }),
    ...(input.yardsticks === undefined
      ? {}
      : { yardsticks: { central: { ...input.yardsticks.central }, known: { ...input.yardsticks.known } } }),
    digest: input.digest,
    ticks: input.ticks,
    wall_s: input.wall_s,
    version: input.version,
    node: input.node,
  };
}

/** The unmet limit that broke first. */
function whyFailed(limits: readonly LimitResult[], input: OutcomeInput): NonNullable<Outcome['why']> | null {
  let first: LimitResult | null = null;
  let firstS = Infinity;
  for (const limit of limits) {
    if (limit.met) continue;
    const at_s = brokeAtS(limit, input) ?? input.report.lastS;
    if (first !== null && at_s >= firstS) continue;
    first = limit;
    firstS = at_s;
  }
  return first === null
    ? null
    : {
        firstBreach: first.name,
        at_s: brokeAtS(first, input),
        faultsThen: faultsAt(input.trial, firstS),
        repeat: input.repeat,
      };
}

/**
 * When a limit broke: a greatest or least value as it passed the limit, forming up when its time was
 * over, a measure that never came at the end of the run, a mean square where its worst is; null for
 * what has no moment.
 */
function brokeAtS(limit: LimitResult, { report }: OutcomeInput): number | null {
  if (limit.name === 'formUpWithin') return Math.min(limit.limit, report.lastS);
  if (limit.value === null) return report.lastS;
  if (limit.name === 'crossTrackMax' || limit.name === 'separationMin') return report.breach[limit.name];
  return limit.worst.at_s;
}

/** Where a limit stood worst, in words; empty if that is no vehicle and no moment. */
export function worstWords(worst: LimitResult['worst']): string {
  const who = worst.with === undefined ? worst.vehicle : `${worst.vehicle} and ${worst.with}`;
  if (who === null) return worst.at_s === null ? '' : `at ${clock(worst.at_s)}`;
  return worst.at_s === null ? who : `${who} at ${clock(worst.at_s)}`;
}

/** The verdict and why, in one or two sentences. */
export function verdictSentence(outcome: Outcome): string {
  const { limits } = outcome;
  if (limits.length === 0) return 'Pass: the trial sets no limits.';
  const broken = limits.filter((limit) => !limit.met);
  const count = (number: number): string => `${number} limit${number === 1 ? '' : 's'}`;
  if (broken.length === 0) {
    const all = limits.length === 1 ? 'the one limit is' : `all ${count(limits.length)} are`;
    // A limit of zero has no room to speak of, and one without a value none to compare.
    const roomy = limits.filter((limit) => limit.limit !== 0 && limit.value !== null);
    if (roomy.length === 0) return `Pass: ${all} met.`;
    const tight = roomy.reduce((least, limit) => (marginShare(limit) < marginShare(least) ? limit : least));
    return (
      `Pass: ${all} met. Least room: ${tight.name} ${figure(tight.value, tight.unit)}, ` +
      `${bound(tight)} ${figure(tight.limit, tight.unit)}.`
    );
  }
  if (outcome.measures.formUp_s === null && limits.some((limit) => !limit.met && limit.value === null)) {
    const last = limits.find((limit) => !limit.met && limit.value === null)!.worst;
    const who = worstWords(last);
    return (
      `Fail: the fleet never formed up${who === '' ? '' : ` (last out: ${who})`}, ` +
      `so ${broken.length} of ${count(limits.length)} ${broken.length === 1 ? 'is' : 'are'} not met.`
    );
  }
  const first = broken.find((limit) => limit.name === outcome.why?.firstBreach) ?? broken[0]!;
  const where = worstWords(first.worst);
  return (
    `Fail: ${broken.length} of ${count(limits.length)} ${broken.length === 1 ? 'is' : 'are'} not met. ` +
    `${broken.length === 1 ? 'It is' : 'First'}: ${first.name} ${figure(first.value, first.unit)}, ` +
    `${bound(first)} ${figure(first.limit, first.unit)}${where === '' ? '' : `; worst ${where}`}.`
  );
}

/** "at most" or "at least". */
export function bound(limit: { readonly name: string }): string {
  return isLeast(limit.name) ? 'at least' : 'at most';
}

/** The outcome for a terminal: the sentence, the limits as a table, what else matters. */
export function outcomeLines(outcome: Outcome): string[] {
  const lines = [`${outcome.title}, seed ${outcome.seed}`, verdictSentence(outcome)];
  if (outcome.except !== undefined) lines.push(exceptSentence(outcome.except));
  if (outcome.limits.length > 0) lines.push('', ...limitTable(outcome.limits));
  if (outcome.why !== undefined) lines.push('', `Again: ${outcome.why.repeat}`);
  return lines;
}

/** What `limits.except` took out. */
export function exceptSentence(except: readonly string[]): string {
  const names = except.join(', ');
  return `Not counted in the loop measures, by the trial's limits: ${names}. Separation counts every vehicle.`;
}

function limitTable(limits: Outcome['limits']): string[] {
  const rows = limits.map((limit) => [
    limit.met ? 'met' : 'NOT MET',
    limit.name,
    figure(limit.value, limit.unit),
    `${bound(limit)} ${figure(limit.limit, limit.unit)}`,
    marginFigure(limit.margin, limit.unit),
    worstWords(limit.worst),
  ]);
  const table = [['', 'limit', 'value', 'allowed', 'margin', 'worst'], ...rows];
  const widths = table[0]!.map((_head, column) => Math.max(...table.map((row) => row[column]!.length)));
  const isFigure = (column: number): boolean => column === 2 || column === 4;
  return table.map((row) =>
    row
      .map((cell, column) =>
        isFigure(column) ? cell.padStart(widths[column]!) : cell.padEnd(widths[column]!),
      )
      .join('  ')
      .trimEnd(),
  );
}
