/** Relations within and between faults and orders, beyond what their keys can say. */
import { sayQuantity } from '../../messages/units.ts';
import { ONE_OF, SOME_OF, TOGETHER, type TrialFault } from './fault-schema.ts';
import type { Finding } from './finding.ts';
import type { Trial } from './schema.ts';
import { didYouMean } from './spelling.ts';
import type { Path } from './tree.ts';

export function checkScript(trial: Trial): Finding[] {
  return [
    ...trial.faults.flatMap((fault, index) => checkFault(fault, ['faults', index])),
    ...checkNames(trial),
    ...checkTimes(trial),
  ];
}

function checkFault(fault: TrialFault, path: Path): Finding[] {
  const has = (key: string): boolean => (fault as Record<string, unknown>)[key] !== undefined;
  const findings: Finding[] = [];
  const oneOf = ONE_OF[fault.kind];
  const found = oneOf?.filter(has) ?? [];
  if (oneOf !== undefined && found.length !== 1) {
    const what = found.length === 0 ? 'changes nothing' : `has ${found.join(' and ')}`;
    findings.push({ path, found: what, allowed: `must have one of ${oneOf.join(', ')}` });
  }
  const someOf = SOME_OF[fault.kind];
  if (someOf !== undefined && !someOf.some(has)) {
    const allowed = `must have one or more of ${someOf.join(', ')}`;
    findings.push({ path, found: 'changes nothing', allowed });
  }
  const [first, second] = TOGETHER[fault.kind] ?? [];
  if (first !== undefined && second !== undefined && has(first) !== has(second)) {
    const [there, missing] = has(first) ? [first, second] : [second, first];
    findings.push({ path, found: `has ${there} alone`, allowed: `must have ${missing} with it` });
  }
  return findings;
}

function checkNames(trial: Trial): Finding[] {
  const fleet = trial.fleet.vehicles.map(({ name }) => name);
  const stranger = (path: Path, name: string): Finding[] => {
    if (fleet.includes(name)) return [];
    const allowed = `must be a vehicle of the fleet: ${fleet.join(', ')}${didYouMean(name, fleet)}`;
    return [{ path, found: `is ${name}`, allowed }];
  };
  const strangers = (path: Path, named: unknown): Finding[] => {
    if (Array.isArray(named)) {
      return named.flatMap((name, index) => stranger([...path, index], String(name)));
    }
    return named === undefined || named === 'all' ? [] : stranger(path, String(named));
  };
  return [
    ...trial.faults.flatMap((fault, index) =>
      ['vehicle', 'from', 'to'].flatMap((key) =>
        strangers(['faults', index, key], (fault as Record<string, unknown>)[key]))),
    ...trial.orders.flatMap((order, index) => strangers(['orders', index, 'vehicle'], order.vehicle)),
  ];
}

function checkTimes(trial: Trial): Finding[] {
  const late = (path: Path, atS: number): Finding[] => {
    if (atS < trial.duration) return [];
    const allowed = `must be before the trial's end at ${sayQuantity(trial.duration, 'time')}`;
    return [{ path, found: `is ${sayQuantity(atS, 'time')}`, allowed }];
  };
  return [
    ...trial.faults.flatMap((fault, index) => late(['faults', index, 'at'], fault.at)),
    ...trial.orders.flatMap((order, index) => late(['orders', index, 'at'], order.at)),
  ];
}
