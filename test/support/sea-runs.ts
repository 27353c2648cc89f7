/** Runs of the sea without agents: steers from a function, hearings collected. */
import type { Hearing, Sea } from '../../hil-sim/sea/sea.ts';
import type { Sense } from '../../messages/sense.ts';
import { steerTo } from './sea-plan.ts';

export const FRAME = 'ab'.repeat(32);

export interface Ordered {
  readonly heading_deg: number;
  readonly speed_mps: number;
  readonly say?: string | null;
}

/** Runs `ticks` ticks; every frame heard is used. */
export function runSea(sea: Sea, ticks: number, order: (sense: Sense, index: number) => Ordered): Hearing[] {
  const hearings: Hearing[] = [];
  for (let tick = 0; tick < ticks; tick++) {
    const senses = sea.perceive();
    sea.advance(senses.map((sense, index) => (sense === null
      ? null
      : steerTo(sense.tick, { ...order(sense, index), heard: sense.heard.length }))));
    hearings.push(...sea.takeHearings());
  }
  return hearings;
}

/** Every sense of a run, as text. */
export function sensesOf(sea: Sea, ticks: number, order: (sense: Sense, index: number) => Ordered): string[] {
  const texts: string[] = [];
  runSea(sea, ticks, (sense, index) => {
    texts.push(`${index} ${JSON.stringify(sense)}`);
    return order(sense, index);
  });
  return texts;
}
