/**
 * A trial from its file: joined, changed by `--set`, checked. Either a trial that can run, or every
 * mistake at once, each with its place; nothing is half accepted.
 */
import { z } from 'zod';
import { checkTrial } from './checks.ts';
import { placeOf, readTree, type Path, type Tree } from './documents.ts';
import { findNotBuilt } from './not-built.ts';
import { formatProblem, type Problem } from './problem.ts';
import { trialSchema, type Trial } from './schema.ts';
import { applySet } from './set.ts';
import { describeIssue } from './zod-problems.ts';

export { formatProblem, type Problem };

export interface LoadOptions {
  /** `path=value`, applied in order after the files are joined. */
  readonly sets?: readonly string[];
  readonly seed?: number;
}

export type LoadResult =
  | { readonly ok: true; readonly trial: Trial }
  | { readonly ok: false; readonly problems: readonly Problem[] };

/** Reads and checks a trial file. */
export function loadTrial(path: string, options: LoadOptions = {}): LoadResult {
  const problems: Problem[] = [];
  const tree = readTree(path, problems);
  if (problems.length > 0) return { ok: false, problems };
  if (typeof tree.value !== 'object' || tree.value === null || Array.isArray(tree.value)) {
    return { ok: false, problems: [{ ...placeOf(tree, []), key: '', message: 'holds no keys, but must be a trial' }] };
  }
  for (const setting of options.sets ?? []) applySet(tree, setting, problems);
  if (options.seed !== undefined) (tree.value as Record<string, unknown>)['seed'] = options.seed;
  const trial = checkTree(tree, problems);
  return trial === null || problems.length > 0 ? { ok: false, problems: inOrder(problems) } : { ok: true, trial };
}

const isWithin = (path: Path, outer: Path): boolean =>
  outer.every((step, index) => String(path[index]) === String(step));

function checkTree(tree: Tree, problems: Problem[]): Trial | null {
  const report = (path: Path, message: string, atKey = false): void => {
    problems.push({ ...placeOf(tree, path, atKey), key: path.join('.'), message });
  };
  const notBuilt = findNotBuilt(tree.value);
  for (const { path, what } of notBuilt) report(path, `${what} is not built yet`, true);
  const reading = z.safeDecode(trialSchema, tree.value as z.input<typeof trialSchema>);
  if (!reading.success) {
    for (const issue of reading.error.issues) {
      for (const { path, message, atKey } of describeIssue(issue, tree.value)) {
        const isNamed = notBuilt.some((known) => isWithin(path, known.path)
          || (String(known.path.at(-1)).match(/^(shape|kind)$/) !== null && isWithin(path, known.path.slice(0, -1))));
        if (!isNamed) report(path, message, atKey);
      }
    }
    return null;
  }
  for (const { path, message } of checkTrial(reading.data)) report(path, message);
  return reading.data;
}

/** By file, then by place; what has no place comes last. */
function inOrder(problems: readonly Problem[]): Problem[] {
  const rank = (problem: Problem): number => (problem.line ?? 1e9) * 1000 + (problem.column ?? 0);
  return [...problems].sort((a, b) => (a.file < b.file ? -1 : a.file > b.file ? 1 : rank(a) - rank(b)));
}
