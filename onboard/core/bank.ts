/**
 * A bank of filters over the same notes, alike but for how fast and how strongly the water is taken to
 * change: nobody knows beforehand. The one under which the notes were likeliest of late answers.
 *
 * Score of a member: Σ log likelihood of its notes, each note's share fading with an e-folding time; a
 * note counts for no more than `DISTANCE2_MOST`, so that one bad note does not decide. Another member
 * takes over only when it leads by `LEAD_LEAST`. All of it follows from the notes in canonical order.
 */
import { copyFilter, resetFilter, startFilter, type Filter, type FilterPlan } from './filter.ts';
import type { Note } from '../../messages/frame.ts';
import { DISTANCE2, LOG_SPREAD, takeIn, writeNoteRows } from './take-note.ts';

/** Per member: decorrelation time and prior sd of the map's modes, over those of the settings. */
const MEMBERS = [
  { time: 1, sigma: 1 },
  { time: 3, sigma: 0.8 },
  { time: 0.22, sigma: 1.15 },
] as const;
const FADE_S = 5400;
const DISTANCE2_MOST = 30;
const LEAD_LEAST = 3;

export interface Bank {
  readonly members: readonly Filter[];
  readonly scores: Float64Array;
  /** The member that answers. */
  readonly choice: { member: number };
}

/** The members' plans: they share layout, basis and scratch. */
export function bankPlans(plan: FilterPlan): readonly FilterPlan[] {
  return MEMBERS.map(({ time, sigma }) => ({
    ...plan,
    modePerS: plan.modePerS / time,
    modeSigmaMps: plan.modeSigmaMps * sigma,
  }));
}

export function startBank(plans: readonly FilterPlan[]): Bank {
  return { members: plans.map(startFilter), scores: new Float64Array(plans.length), choice: { member: 0 } };
}

export function resetBank(plans: readonly FilterPlan[], bank: Bank): void {
  for (let index = 0; index < plans.length; index++) resetFilter(plans[index]!, bank.members[index]!);
  bank.scores.fill(0);
  bank.choice.member = 0;
}

export function copyBank(from: Bank, to: Bank): void {
  for (let index = 0; index < from.members.length; index++) {
    copyFilter(from.members[index]!, to.members[index]!);
  }
  to.scores.set(from.scores);
  to.choice.member = from.choice.member;
}

/** The filter that answers. */
export function chosen(bank: Bank): Filter {
  return bank.members[bank.choice.member]!;
}

/** Takes a note into every member and judges them by it. */
export function takeIntoBank(plans: readonly FilterPlan[], bank: Bank, note: Note): void {
  const { members, scores, choice } = bank;
  const fade = Math.exp(-Math.max(0, note.endS - members[0]!.clock.atS) / FADE_S);
  let best = 0;
  writeNoteRows(plans[0]!, note);
  for (let index = 0; index < plans.length; index++) {
    const plan = plans[index]!;
    takeIn(plan, members[index]!, note);
    const { fit } = plan.scratch;
    const lost = Math.min(DISTANCE2_MOST, fit[DISTANCE2]!) + fit[LOG_SPREAD]!;
    scores[index] = fade * scores[index]! - lost / 2;
    if (scores[index]! > scores[best]!) best = index;
  }
  if (scores[best]! > scores[choice.member]! + LEAD_LEAST) choice.member = best;
}
