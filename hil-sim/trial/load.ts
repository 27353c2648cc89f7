/**
 * A trial from its file: joined, changed by `--set`, checked. Either a trial that can run, or every
 * mistake at once, each with its place; nothing is half accepted.
 *
 * Mistakes come in two waves: what each key says by itself, and, once every key can be read, what the
 * keys say together.
 */
import { z } from 'zod';
import { checkTrial } from './checks.ts';
import { readTree } from './documents.ts';
import type { Finding } from './finding.ts';
import { findNotBuilt, isExplained } from './not-built.ts';
import { formatProblem, problemAt, type Problem } from './problem.ts';
import { trialSchema, type Trial } from './schema.ts';
import { applySet } from './set.ts';
import { forgetPlaces, isWithin, pathKey, placeOf, type Tree } from './tree.ts';
import { describeIssue, shown } from './zod-problems.ts';

export { formatProblem, type Problem };

/** No one reads more at once. */
const PROBLEMS_TOLD = 100;

export interface LoadOptions {
  /** `path=value`, applied in order after the files are joined. */
  readonly sets?: readonly string[];
  /** In place of the file's own. */
  readonly seed?: number;
}

export type LoadResult =
  | { readonly ok: true; readonly trial: Trial; readonly sources: readonly string[] }
  | { readonly ok: false; readonly problems: readonly Problem[] };

/** Reads and checks a trial file; `sources` are the files read, the trial's own first. */
export function loadTrial(path: string, options: LoadOptions = {}): LoadResult {
  const problems: Problem[] = [];
  const { tree, sources } = readTree(path, problems);
  if (tree.value === undefined) return { ok: false, problems };
  if (typeof tree.value !== 'object' || tree.value === null || Array.isArray(tree.value)) {
    const found = { key: '', found: `is ${shown(tree.value)}`, allowed: 'must be the keys of a trial' };
    return { ok: false, problems: [problemAt(placeOf(tree, []), found)] };
  }
  for (const setting of options.sets ?? []) applySet(tree, setting, problems);
  if (options.seed !== undefined) setSeed(tree, options.seed);
  const trial = checkTree(tree, problems);
  if (trial === null || problems.length > 0) return { ok: false, problems: told(problems) };
  return { ok: true, trial, sources };
}

function setSeed(tree: Tree, seed: number): void {
  forgetPlaces(tree, ['seed']);
  tree.places.set(pathKey(['seed']), { file: `--seed ${seed}`, line: null, column: null });
  (tree.value as Record<string, unknown>)['seed'] = seed;
}

/** The trial that a tree says; null, with problems told, if it says none. */
function checkTree(tree: Tree, problems: Problem[]): Trial | null {
  const tell = ({ path, found, allowed, atKey }: Finding): void => {
    problems.push(problemAt(placeOf(tree, path, atKey), { key: path.join('.'), found, allowed }));
  };
  const notBuilt = findNotBuilt(tree.value);
  notBuilt.forEach(tell);
  const reading = z.safeDecode(trialSchema, tree.value as z.input<typeof trialSchema>);
  if (reading.success) {
    checkTrial(reading.data).forEach(tell);
    return reading.data;
  }
  for (const finding of reading.error.issues.flatMap((issue) => describeIssue(issue, tree.value))) {
    const isUnread = tree.unread.some((path) => isWithin(finding.path, path));
    if (!isUnread && !isExplained(finding.path, notBuilt)) tell(finding);
  }
  return null;
}

/** By file, then by place; what has no line comes after what has. */
function told(problems: readonly Problem[]): Problem[] {
  const inOrder = [...problems].sort((a, b) =>
    (a.file < b.file ? -1 : a.file > b.file ? 1 : 0)
    || (a.line ?? Infinity) - (b.line ?? Infinity) || (a.column ?? 0) - (b.column ?? 0));
  const rest = inOrder.length - PROBLEMS_TOLD;
  if (rest <= 0) return inOrder;
  const { file } = inOrder[PROBLEMS_TOLD]!;
  const more = { key: '', found: `has ${rest} problems more`, allowed: '' };
  return [...inOrder.slice(0, PROBLEMS_TOLD), problemAt({ file, line: null, column: null }, more)];
}
