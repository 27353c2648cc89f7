/**
 * What the design names and this build does not have yet. Such a key or value is refused by name,
 * never ignored and never called unknown. Each feature that lands deletes its line here.
 */
import type { Finding } from './finding.ts';
import { isWithin, type Path } from './tree.ts';

interface Row {
  /** Key path; `*` stands for any list item or key. */
  readonly path: readonly string[];
  /** Values that are not built; absent for the key as such. */
  readonly values?: readonly unknown[];
}

const SHAPES_LATER = ['ellipse', 'racetrack', 'outline'];
const FAULTS_LATER = [
  'deaf', 'blackout', 'noise', 'collisions', 'forged', 'replayed', 'thruster', 'rudder', 'battery', 'clock',
  'broker', 'network', 'agent',
];

const ROWS: readonly Row[] = [
  { path: ['faults', '*', 'kind'], values: FAULTS_LATER },
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
  { path: ['limits', 'framesSent'] },
  { path: ['limits', 'deliveryRatio'] },
];

/** Keys that another one takes the place of, so that they are not missing beside it. */
const IN_PLACE_OF: Record<string, Path> = { 'mission.loops': ['mission', 'loop'] };

/** Every not-built thing in a tree of plain values, in the order of the table. */
export function findNotBuilt(tree: unknown): Finding[] {
  return ROWS.flatMap((row) => findRow(tree, row, []));
}

function findRow(value: unknown, row: Row, at: Path): Finding[] {
  const step = row.path[at.length];
  if (step === undefined) {
    if (row.values === undefined) return [{ path: at, found: 'is not built yet', allowed: '', atKey: true }];
    if (!row.values.includes(value)) return [];
    return [{ path: at, found: `is ${String(value)}, which is not built yet`, allowed: '' }];
  }
  if (typeof value !== 'object' || value === null) return [];
  const keys: (string | number)[] = Array.isArray(value) ? [...value.keys()] : Object.keys(value);
  return keys
    .filter((key) => step === '*' || key === step)
    .flatMap((key) => findRow((value as Record<string | number, unknown>)[key], row, [...at, key]));
}

/** Whether a mistake at `path` comes of something not built: in it, of its kind or shape, or in its place. */
export function isExplained(path: Path, notBuilt: readonly Finding[]): boolean {
  return notBuilt.some((known) => {
    const names = ['shape', 'kind'].includes(String(known.path.at(-1)));
    const replaced = IN_PLACE_OF[known.path.join('.')];
    return isWithin(path, names ? known.path.slice(0, -1) : known.path)
      || (replaced !== undefined && isWithin(path, replaced));
  });
}
