/** Relations within and between faults and orders, beyond what their keys can say. */
import { formatQuantity } from '../../messages/units.ts';
import type { Finding } from './finding.ts';
import { ONE_OF, SOME_OF, TOGETHER } from './fault-schema.ts';
import type { Trial } from './schema.ts';

export function checkScript(trial: Trial): Finding[] {
  return [...checkFaults(trial), ...checkNames(trial), ...checkTimes(trial)];
}

function checkFaults(trial: Trial): Finding[] {
  return trial.faults.flatMap((fault, index): Finding[] => {
    const path = ['faults', index];
    const has = (key: string): boolean => (fault as Record<string, unknown>)[key] !== undefined;
    const findings: Finding[] = [];
    const oneOf = ONE_OF[fault.kind];
    const found = oneOf?.filter(has) ?? [];
    if (oneOf !== undefined && found.length !== 1) {
      const what = found.length === 0 ? 'none' : found.join(' and ');
      findings.push({ path, message: `has ${what} of ${oneOf.join(', ')}, but must have one` });
    }
    const someOf = SOME_OF[fault.kind];
    if (someOf !== undefined && !someOf.some(has)) {
      findings.push({ path, message: `changes nothing, but must have one or more of ${someOf.join(', ')}` });
    }
    const [first, second] = TOGETHER[fault.kind] ?? [];
    if (first !== undefined && second !== undefined && has(first) !== has(second)) {
      findings.push({
        path,
        message: `has ${has(first) ? first : second} alone, but ${first} and ${second} come together`,
      });
    }
    return findings;
  });
}

function checkNames(trial: Trial): Finding[] {
  const fleet = trial.fleet.vehicles.map(({ name }) => name);
  const strangers = (path: (string | number)[], named: unknown): Finding[] => {
    const list: unknown[] = named === undefined ? [] : Array.isArray(named) ? named : [named];
    return list.flatMap((name, index) =>
      fleet.includes(String(name)) || name === 'all'
        ? []
        : [
            {
              path: Array.isArray(named) ? [...path, index] : path,
              message: `is ${String(name)}, but must be a vehicle of the fleet: ${fleet.join(', ')}`,
            },
          ],
    );
  };
  return [
    ...trial.faults.flatMap((fault, index) =>
      ['vehicle', 'from', 'to'].flatMap((key) =>
        strangers(['faults', index, key], (fault as Record<string, unknown>)[key]),
      ),
    ),
    ...trial.orders.flatMap((order, index) => strangers(['orders', index, 'vehicle'], order.vehicle)),
  ];
}

function checkTimes(trial: Trial): Finding[] {
  const late = (path: (string | number)[], atS: number): Finding[] =>
    atS < trial.duration
      ? []
      : [
          {
            path,
            message: `is ${formatQuantity(atS, 'time')}, ` +
              `but the trial ends at ${formatQuantity(trial.duration, 'time')}`,
          },
        ];
  return [
    ...trial.faults.flatMap((fault, index) => late(['faults', index, 'at'], fault.at)),
    ...trial.orders.flatMap((order, index) => late(['orders', index, 'at'], order.at)),
  ];
}
