/** Issues of the schema as sentences: what was found, what is allowed, and what was likely meant. */
import type { z } from 'zod';
import type { Finding } from './finding.ts';
import type { Refusal } from './quantity.ts';
import { descriptionAt, keysAt, kindsAt, valueAt } from './schema-keys.ts';
import { didYouMean, oneOf } from './spelling.ts';
import type { Path } from './tree.ts';

type Issue = z.core.$ZodIssue;

const SHOWN_MOST = 60;

/** A value as an error shows it: short, on one line. */
export function shown(value: unknown): string {
  if (value === undefined) return 'missing';
  if (value === null) return 'empty';
  if (Array.isArray(value)) return value.length === 0 ? 'an empty list' : `a list of ${value.length}`;
  if (typeof value === 'object') return 'a group of keys';
  const text = typeof value === 'string' ? JSON.stringify(value) : String(value);
  return text.length > SHOWN_MOST ? `${text.slice(0, SHOWN_MOST - 1)}…` : text;
}

const KINDS: Record<string, string> = {
  object: 'a group of keys',
  array: 'a list',
  string: 'text',
  number: 'a finite number',
  int: 'a whole number',
  boolean: 'true or false',
};

/** One schema issue as one or more findings. */
export function describeIssue(issue: Issue, root: unknown): Finding[] {
  const path = issue.path as Path;
  const value = valueAt(root, path);
  const found = `is ${shown(value)}`;
  const say = (allowed: string): Finding[] => [{ path, found, allowed: `must ${allowed}` }];
  switch (issue.code) {
    case 'unrecognized_keys':
      return issue.keys.map((key) => unknownKey(key, path, root));
    case 'invalid_type':
      return say(`be ${KINDS[issue.expected] ?? issue.expected}`);
    case 'invalid_value':
      return say(`be ${choice(value, issue.values.map(String))}`);
    case 'too_small':
      return say(bound(issue, 'more than', 'at least', issue.minimum));
    case 'too_big':
      return say(bound(issue, 'less than', 'at most', issue.maximum));
    case 'invalid_union':
      return say(`be ${unionAllows(path, root)}`);
    case 'custom':
      return [{ path, ...(issue.params as unknown as Refusal) }];
    default:
      return say(`be ${descriptionAt(path, root) ?? 'something else'}`);
  }
}

interface Bound {
  readonly origin: string;
  readonly inclusive?: boolean;
}

/** "be at least 3", "have at most 16 items". */
function bound(of: Bound, open: string, closed: string, value: number | bigint): string {
  const text = `${of.inclusive === false ? open : closed} ${value}`;
  const many = Number(value) === 1 ? '' : 's';
  if (of.origin === 'array') return `have ${text} item${many}`;
  if (of.origin === 'string') return `have ${text} character${many}`;
  return `be ${text}`;
}

function choice(value: unknown, words: readonly string[]): string {
  return `${oneOf(words)}${typeof value === 'string' ? didYouMean(value, words) : ''}`;
}

/** What a union allows: its kinds, if `path` is that of a kind, else what its description says. */
function unionAllows(path: Path, root: unknown): string {
  const kinds = kindsAt(path.slice(0, -1), root);
  if (path.at(-1) === 'kind' && kinds.length > 0) return choice(valueAt(root, path), kinds);
  return descriptionAt(path, root) ?? 'one of the forms of this key';
}

function unknownKey(key: string, path: Path, root: unknown): Finding {
  const allowed = keysAt(path, root);
  return {
    path: [...path, key],
    found: 'is no key here',
    allowed: `must be ${oneOf(allowed)}${didYouMean(key, allowed)}`,
    atKey: true,
  };
}
