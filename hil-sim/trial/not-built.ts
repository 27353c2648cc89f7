/**
 * What the design names and this build does not have yet. Such a key or value is refused by name,
 * never ignored and never called unknown. Each feature that lands deletes its line here.
 */
import type { Path } from './documents.ts';

export interface NotBuilt {
  readonly path: Path;
  readonly what: string;
}

interface Row {
  /** Key path; `*` stands for any list item or key. */
  readonly path: readonly string[];
  /** Values that are not built; absent for the key as such. */
  readonly values?: readonly unknown[];
}

const SHAPES_LATER = ['ellipse', 'racetrack', 'outline'];

const ROWS: readonly Row[] = [
  {
    path: ['faults', '*', 'kind'],
    values: [
      'deaf', 'blackout', 'noise', 'collisions', 'forged', 'replayed', 'thruster', 'rudder', 'battery', 'clock',
      'broker', 'network', 'agent',
    ],
  },
  { path: ['mission', 'loops'] },
  { path: ['mission', 'moving'] },
  { path: ['mission', 'follow'] },
  { path: ['mission', 'loop', 'moving'] },
  { path: ['mission', 'loop', 'follow'] },
  { path: ['mission', 'loop', 'shape'], values: SHAPES_LATER },
  { path: ['mission', 'keepIn', 'shape'], values: SHAPES_LATER },
  { path: ['mission', 'keepOut', '*', 'shape'], values: SHAPES_LATER },
  { path: ['mission', 'spacing'], values: ['time'] },
  { path: ['mission', 'sharing'], values: ['consensus', 'intersection'] },
  { path: ['water', 'currents', '*', 'kind'], values: ['forecast'] },
  { path: ['modem', 'physics'], values: ['on', true] },
];

/** Every not-built thing in a tree of plain values, in the order of the table. */
export function findNotBuilt(tree: unknown): NotBuilt[] {
  return ROWS.flatMap((row) => findRow(tree, row, []));
}

function findRow(value: unknown, row: Row, at: Path): NotBuilt[] {
  const step = row.path[at.length];
  if (step === undefined) {
    if (row.values === undefined) return [{ path: at, what: `'${at.join('.')}'` }];
    return row.values.includes(value) ? [{ path: at, what: `'${String(value)}'` }] : [];
  }
  if (typeof value !== 'object' || value === null) return [];
  const keys: (string | number)[] = Array.isArray(value) ? [...value.keys()] : Object.keys(value);
  return keys
    .filter((key) => step === '*' || key === step)
    .flatMap((key) => findRow((value as Record<string | number, unknown>)[key], row, [...at, key]));
}
