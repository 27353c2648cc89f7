/**
 * Whose loop counts when: the script ends a vehicle's part, never the vehicle's own claim.
 *
 * An order `home` or `surface` ends its part for good. A scripted reboot of more than fifteen minutes
 * takes it out from one lap after it went down until one lap after it came up again; until then, and
 * through shorter ones, it counts, whatever it does. A lap is the loop's length at cruise speed.
 */
import type { Trial } from '../trial/schema.ts';
import { fullVehicles } from '../trial/vehicles.ts';
import { vehicleIndexes } from '../trial/fault-plan.ts';

const LONG_REBOOT_S = 15 * 60;

export interface OutSpan {
  readonly index: number;
  readonly fromS: number;
  readonly untilS: number;
}

/** The spans for which vehicles do not count, for a loop of `lengthM`. */
export function outSpans(trial: Trial, lengthM: number): OutSpan[] {
  const vehicles = fullVehicles(trial);
  const lapS = (index: number): number => lengthM / vehicles[index]!.speed.cruise;
  const ordered = trial.orders
    .filter(({ order }) => order === 'home' || order === 'surface')
    .flatMap(({ at, vehicle }) =>
      vehicleIndexes(trial, vehicle).map((index) => ({ index, fromS: at, untilS: Infinity })),
    );
  const rebooted = trial.faults.flatMap((fault) => {
    const spanS = fault.for ?? Infinity;
    if (fault.kind !== 'reboot' || spanS <= LONG_REBOOT_S) return [];
    return vehicleIndexes(trial, fault.vehicle).map((index) => ({
      index,
      fromS: fault.at + lapS(index),
      untilS: fault.at + spanS + lapS(index),
    }));
  });
  return [...ordered, ...rebooted];
}

/** The next time after `timeS` at which any span begins or ends. */
export function nextChangeS(spans: readonly OutSpan[], timeS: number): number {
  let next = Infinity;
  for (const { fromS, untilS } of spans) {
    if (fromS > timeS) next = Math.min(next, fromS);
    if (untilS > timeS) next = Math.min(next, untilS);
  }
  return next;
}

export function isOut(spans: readonly OutSpan[], index: number, timeS: number): boolean {
  return spans.some((span) => span.index === index && span.fromS <= timeS && timeS < span.untilS);
}
