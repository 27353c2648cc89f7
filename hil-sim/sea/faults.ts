/**
 * Which upsets hold at a time: a pure function of the script. A fault's value replaces the one it
 * upsets for its span; of two at once on one quantity the later line wins. A compass or log `step` is
 * added to what the vehicle has, a compass `drift` grows from the fault's beginning.
 */
import type { CurrentPlan, FaultPlan, FixUpset, LinkPlan, OrderPlan } from './plan.ts';

type Faults = readonly FaultPlan[];

function holds(fault: FaultPlan, timeS: number): boolean {
  return fault.atS <= timeS && timeS < fault.untilS;
}

/** The compass bias of a vehicle whose own is `ownRad`. */
export function compassBiasAt(faults: Faults, index: number, at: { timeS: number; ownRad: number }): number {
  let biasRad = at.ownRad;
  for (const fault of faults) {
    if (fault.kind !== 'compass' || !holds(fault, at.timeS) || !fault.vehicles.includes(index)) continue;
    if (fault.how === 'step') biasRad = at.ownRad + fault.amount;
    else if (fault.how === 'bias') biasRad = fault.amount;
    else biasRad = at.ownRad + fault.amount * (at.timeS - fault.atS);
  }
  return biasRad;
}

/** The log scale of a vehicle whose own is `own`. */
export function logScaleAt(faults: Faults, index: number, at: { timeS: number; own: number }): number {
  let scale = at.own;
  for (const fault of faults) {
    if (fault.kind !== 'log' || !holds(fault, at.timeS) || !fault.vehicles.includes(index)) continue;
    scale = fault.how === 'step' ? at.own + fault.amount : fault.amount;
  }
  return scale;
}

/** What upsets a vehicle's fixes, or null. */
export function fixUpsetAt(faults: Faults, index: number, timeS: number): FixUpset | null {
  let upset: FixUpset | null = null;
  for (const fault of faults) {
    if (fault.kind === 'fix' && holds(fault, timeS) && fault.vehicles.includes(index)) upset = fault.upset;
  }
  return upset;
}

/** A directed link at a time, and whether a fault has set its loss. */
export function linkAt(
  faults: Faults, pair: { from: number; to: number; timeS: number }, own: LinkPlan,
): { link: LinkPlan; lossByFault: boolean } {
  let link = own;
  let lossByFault = false;
  for (const fault of faults) {
    if (fault.kind !== 'link' || !holds(fault, pair.timeS)) continue;
    if (!fault.from.includes(pair.from) || !fault.to.includes(pair.to)) continue;
    link = { ...link, ...fault.change };
    if (fault.change.loss !== undefined || fault.change.burst !== undefined) lossByFault = true;
  }
  return { link, lossByFault };
}

/** Why an agent is down at a time, or null: the memory it will start from. */
export function rebootAt(faults: Faults, index: number, timeS: number): 'lost' | 'kept' | null {
  let memory: 'lost' | 'kept' | null = null;
  for (const fault of faults) {
    if (fault.kind === 'reboot' && holds(fault, timeS) && fault.vehicles.includes(index)) memory = fault.memory;
  }
  return memory;
}

/** The currents that faults add, with their spans. */
export interface AddedCurrent {
  readonly atS: number;
  readonly untilS: number;
  readonly current: CurrentPlan;
}

export function addedCurrents(faults: Faults): AddedCurrent[] {
  return faults.flatMap((fault) => (fault.kind === 'current'
    ? [{ atS: fault.atS, untilS: fault.untilS, current: fault.current }]
    : []));
}

/** The orders whose time comes in the tick that starts at `timeS`, for one vehicle, in script order. */
export function ordersAt(
  orders: readonly OrderPlan[], index: number, tick: { timeS: number; tickS: number },
): OrderPlan['order'][] {
  return orders
    .filter((order) => order.atS > tick.timeS - tick.tickS && order.atS <= tick.timeS && order.vehicles.includes(index))
    .map((order) => order.order);
}

/** A fault or order as it took effect, by its place in the script. */
export interface Change {
  readonly what: 'fault' | 'order';
  readonly index: number;
  readonly phase: 'begins' | 'ends' | 'given';
}

/** What begins, ends or is given in the tick that starts at `timeS`. */
export function changesAt(
  faults: Faults, orders: readonly OrderPlan[], tick: { timeS: number; tickS: number },
): Change[] {
  const isNow = (timeS: number): boolean => timeS > tick.timeS - tick.tickS && timeS <= tick.timeS;
  const changes: Change[] = [];
  faults.forEach((fault, index) => {
    if (isNow(fault.atS)) changes.push({ what: 'fault', index, phase: 'begins' });
    if (isNow(fault.untilS)) changes.push({ what: 'fault', index, phase: 'ends' });
  });
  orders.forEach((order, index) => {
    if (isNow(order.atS)) changes.push({ what: 'order', index, phase: 'given' });
  });
  return changes;
}
