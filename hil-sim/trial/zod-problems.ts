/** Issues of the schema as sentences: what was found, what is allowed, and what was likely meant. */
import type { z } from 'zod';
import type { Path } from './documents.ts';
import { trialSchema } from './schema.ts';

export interface Described {
  readonly path: Path;
  readonly message: string;
  /** Whether the place is that of the key, not of its value. */
  readonly atKey: boolean;
}

type Issue = z.core.$ZodIssue;

/** The value at a path of plain values. */
function valueAt(root: unknown, path: Path): unknown {
  return path.reduce<unknown>(
    (value, step) => (value as Record<string | number, unknown> | null | undefined)?.[step],
    root,
  );
}

/** A value as an error shows it: short, on one line. */
function shown(value: unknown): string {
  if (value === undefined) return 'missing';
  if (Array.isArray(value)) return `a list of ${value.length}`;
  if (typeof value === 'object' && value !== null) return 'a group of keys';
  const text = JSON.stringify(value) ?? String(value);
  return text.length > 60 ? `${text.slice(0, 57)}…` : text;
}

const KINDS: Record<string, string> = {
  object: 'a group of keys',
  array: 'a list',
  string: 'text',
  number: 'a number',
  int: 'a whole number',
  boolean: 'true or false',
};

/** One schema issue as one or more sentences with their places. */
export function describeIssue(issue: Issue, root: unknown): Described[] {
  const path = issue.path as Path;
  const found = valueAt(root, path);
  const say = (message: string): Described[] => [{ path, message, atKey: false }];
  switch (issue.code) {
    case 'unrecognized_keys':
      return issue.keys.map((key) => ({
        path: [...path, key],
        message: unknownKey(key, path, root),
        atKey: true,
      }));
    case 'invalid_type':
      return say(`is ${shown(found)}, but must be ${KINDS[issue.expected] ?? issue.expected}`);
    case 'invalid_value':
      return say(
        `is ${shown(found)}, but must be ${oneOf(issue.values)}${meant(String(found), issue.values)}`,
      );
    case 'too_small':
      return say(
        `is ${shown(found)}, but must ${bound(issue, 'more than', 'at least', issue.minimum)}`,
      );
    case 'too_big':
      return say(
        `is ${shown(found)}, but must ${bound(issue, 'less than', 'at most', issue.maximum)}`,
      );
    case 'invalid_format':
      return say(`is ${shown(found)}, but must be like ${formOf(path)}`);
    case 'invalid_union':
      return describeUnion(issue, root);
    default:
      return say(issue.message);
  }
}

interface Bound {
  readonly origin: string;
  readonly inclusive?: boolean;
}

/** "be at least 3", "have at most 16 items". */
function bound(of: Bound, open: string, closed: string, value: number | bigint): string {
  const text = `${of.inclusive === false ? open : closed} ${value}`;
  if (of.origin === 'array') return `have ${text} items`;
  if (of.origin === 'string') return `have ${text} characters`;
  return `be ${text}`;
}

function formOf(path: Path): string {
  return path.at(-1) === 'start'
    ? '2027-05-01T06:00Z'
    : 'amber-2: lower-case letters, digits and hyphens, 24 at most';
}

function describeUnion(issue: Extract<Issue, { code: 'invalid_union' }>, root: unknown): Described[] {
  const path = issue.path as Path;
  const found = valueAt(root, path);
  const last = path.at(-1);
  if ('discriminator' in issue && issue.discriminator !== undefined) {
    const kinds =
      path[0] === 'faults'
        ? ['link', 'compass', 'log', 'fix', 'reboot', 'current']
        : ['uniform', 'tide', 'eddy', 'shear'];
    return [
      {
        path,
        message: `is ${shown(found)}, but must be ${oneOf(kinds)}${meant(String(found), kinds)}`,
        atKey: false,
      },
    ];
  }
  if (last === 'spacing') {
    return [
      {
        path,
        message: `is ${shown(found)}, but must be even or a list of offsets in turns, 0 up to 1`,
        atKey: false,
      },
    ];
  }
  return [{ path, message: `is ${shown(found)}, which is none of the forms allowed here`, atKey: false }];
}

function oneOf(values: readonly unknown[]): string {
  const words = values.map(String);
  return words.length === 1 ? words[0]! : `${words.slice(0, -1).join(', ')} or ${words.at(-1)!}`;
}

function unknownKey(key: string, path: Path, root: unknown): string {
  const allowed = keysAt(path, root);
  if (allowed.length === 0) return 'is no key of a trial here';
  return `is no key here; allowed are ${allowed.join(', ')}${meant(key, allowed)}`;
}

/** Edits that turn one word into another, up to a few. */
function distance(a: string, b: string): number {
  let row = Array.from({ length: b.length + 1 }, (_, index) => index);
  for (let i = 1; i <= a.length; i++) {
    const next = [i];
    for (let j = 1; j <= b.length; j++) {
      const change = row[j - 1]! + (a[i - 1]!.toLowerCase() === b[j - 1]!.toLowerCase() ? 0 : 1);
      next.push(Math.min(change, row[j]! + 1, next[j - 1]! + 1));
    }
    row = next;
  }
  return row[b.length]!;
}

/** "; did you mean …?" if one allowed word is near. */
function meant(word: string, allowed: readonly unknown[]): string {
  const near = allowed
    .map(String)
    .map((candidate) => ({ candidate, edits: distance(word.slice(0, 40), candidate) }))
    .sort((a, b) => a.edits - b.edits)[0];
  return near !== undefined && near.edits <= Math.max(1, Math.floor(word.length / 3))
    ? `; did you mean ${near.candidate}?`
    : '';
}

interface SchemaDef {
  readonly type: string;
  readonly innerType?: { _zod: { def: SchemaDef } };
  readonly element?: { _zod: { def: SchemaDef } };
  readonly shape?: Record<string, { _zod: { def: SchemaDef } }>;
  readonly options?: readonly { _zod: { def: SchemaDef } }[];
}

function unwrap(def: SchemaDef): SchemaDef {
  let inner = def;
  while (inner.innerType !== undefined) inner = inner.innerType._zod.def;
  return inner;
}

/** The keys that the schema allows at a path; none if the path leaves it. */
function keysAt(path: Path, root: unknown): string[] {
  let def = unwrap(trialSchema._zod.def as unknown as SchemaDef);
  for (let index = 0; index < path.length; index++) {
    const next = def.type === 'array' ? def.element : def.shape?.[String(path[index])];
    if (next === undefined) return [];
    def = unwrap(next._zod.def);
    if (def.type === 'union') {
      const kind = (valueAt(root, path.slice(0, index + 1)) as { kind?: unknown } | null)?.kind;
      const option = def.options?.find((candidate) => {
        const values = (candidate._zod.def.shape?.['kind']?._zod.def as unknown as { values?: unknown[] })
          ?.values;
        return values?.includes(kind) ?? false;
      });
      if (option === undefined) return [];
      def = unwrap(option._zod.def);
    }
  }
  return Object.keys(def.shape ?? {});
}
