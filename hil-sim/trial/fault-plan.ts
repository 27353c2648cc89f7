/** From faults and orders of a checked trial to the sea's script. */
import type { FaultPlan, LinkPlan } from '../sea/plan.ts';
import type { TrialFault } from './fault-schema.ts';
import type { Trial } from './schema.ts';

/** Places in the fleet of the vehicles that a fault or order names; absent or `all` is every one. */
export function vehicleIndexes(trial: Trial, named: string | readonly string[] | undefined): number[] {
  const fleet = trial.fleet.vehicles.map(({ name }) => name);
  if (named === undefined || named === 'all') return fleet.map((_name, index) => index);
  return (typeof named === 'string' ? [named] : named)
    .map((name) => fleet.indexOf(name))
    .filter((index) => index >= 0);
}

export function faultPlan(trial: Trial, fault: TrialFault): FaultPlan {
  const span = { atS: fault.at, untilS: fault.for === undefined ? Infinity : fault.at + fault.for };
  switch (fault.kind) {
    case 'link':
      return {
        ...span,
        kind: 'link',
        from: vehicleIndexes(trial, fault.from),
        to: vehicleIndexes(trial, fault.to),
        change: linkChange(fault),
      };
    case 'compass': {
      const how = fault.step !== undefined ? 'step' : fault.bias !== undefined ? 'bias' : 'drift';
      const amount = fault.step ?? fault.bias ?? fault.drift ?? 0;
      return { ...span, kind: 'compass', vehicles: vehicleIndexes(trial, fault.vehicle), how, amount };
    }
    case 'log':
      return {
        ...span,
        kind: 'log',
        vehicles: vehicleIndexes(trial, fault.vehicle),
        how: fault.step !== undefined ? 'step' : 'scale',
        amount: fault.step ?? fault.scale ?? 0,
      };
    case 'fix':
      return { ...span, kind: 'fix', vehicles: vehicleIndexes(trial, fault.vehicle), upset: fixUpset(fault) };
    case 'reboot':
      return {
        ...span,
        kind: 'reboot',
        vehicles: vehicleIndexes(trial, fault.vehicle),
        memory: fault.memory,
      };
    case 'current':
      return { ...span, kind: 'current', current: addedCurrent(fault) };
  }
}

function linkChange(fault: Extract<TrialFault, { kind: 'link' }>): Partial<LinkPlan> {
  return {
    ...(fault.loss === undefined ? {} : { loss: fault.loss }),
    ...(fault.burst === undefined ? {} : { burst: fault.burst }),
    ...(fault.delay === undefined ? {} : { delayS: fault.delay }),
    ...(fault.jitter === undefined ? {} : { jitterS: fault.jitter }),
    ...(fault.repeat === undefined ? {} : { repeat: fault.repeat }),
    ...(fault.garble === undefined ? {} : { garble: fault.garble }),
  };
}

function fixUpset(fault: Extract<TrialFault, { kind: 'fix' }>): Extract<FaultPlan, { kind: 'fix' }>['upset'] {
  if (fault.jump !== undefined) return { how: 'jump', eastM: fault.jump.east, northM: fault.jump.north };
  if (fault.outliers !== undefined)
    return { how: 'outliers', share: fault.outliers, sigmaM: fault.outlierSigma ?? 0 };
  return { how: 'outage' };
}

function addedCurrent(
  fault: Extract<TrialFault, { kind: 'current' }>,
): Extract<FaultPlan, { kind: 'current' }>['current'] {
  const { eddy } = fault;
  if (eddy === undefined) return { kind: 'uniform', setRad: fault.set ?? 0, driftMps: fault.drift ?? 0 };
  return {
    kind: 'eddy',
    centreEastM: eddy.centre.east,
    centreNorthM: eddy.centre.north,
    radiusM: eddy.radius,
    peakMps: eddy.peak,
    turn: eddy.turn,
    movingSetRad: eddy.moving?.set ?? 0,
    movingDriftMps: eddy.moving?.drift ?? 0,
  };
}
