/**
 * A trial's files joined into one tree: a section may be a path to another file, relative to the file
 * that names it.
 */
import { readFileSync, statSync } from 'node:fs';
import { dirname, relative, resolve } from 'node:path';
import { problemAt, type Problem } from './problem.ts';
import { emptyTree, placeOf, type Path, type Place, type Tree } from './tree.ts';
import { readYaml } from './yaml-text.ts';

const SECTIONS = ['mission', 'fleet', 'onboard', 'water', 'modem', 'faults', 'orders', 'limits'];
const FILE_BYTES_MAX = 1024 * 1024;

export interface Joined {
  readonly tree: Tree;
  /** The files that were read, the trial's own first. */
  readonly sources: readonly string[];
}

interface Joining {
  readonly tree: Tree;
  readonly problems: Problem[];
  readonly sources: string[];
}

/** Reads a trial and the files that its sections name; what is wrong is added to `problems`. */
export function readTree(path: string, problems: Problem[]): Joined {
  const joining: Joining = { tree: emptyTree(), problems, sources: [] };
  const own = resolve(path);
  const trouble = troubleWith(own);
  if (trouble === null) joining.tree.value = readOne(own, [], joining);
  else problems.push(problemAt({ file: shownName(own), line: null, column: null }, { key: '', ...trouble }));
  return { tree: joining.tree, sources: joining.sources };
}

/** The name that a person knows a file by: relative to where they stand, if that is shorter. */
function shownName(path: string): string {
  const near = relative(process.cwd(), path);
  return near !== '' && near.length < path.length ? near : path;
}

interface Trouble {
  readonly found: string;
  readonly allowed: string;
}

const SYSTEM_WORDS: Record<string, string> = {
  ENOENT: 'does not exist',
  ENOTDIR: 'does not exist',
  EACCES: 'cannot be read: no permission',
  ELOOP: 'cannot be read: its links run in a circle',
  ENAMETOOLONG: 'cannot be read: its name is too long',
};

/** Why a path cannot be read as a YAML file, or null. */
function troubleWith(path: string): Trouble | null {
  const allowed = 'must be a YAML file';
  try {
    const stat = statSync(path);
    if (stat.isDirectory()) return { found: 'is a folder', allowed };
    if (!stat.isFile()) return { found: 'is no plain file', allowed };
    if (stat.size > FILE_BYTES_MAX) return { found: 'is larger than 1 MiB', allowed };
    const isText = !/[\0\ufffd]/.test(readFileSync(path, 'utf8'));
    return isText ? null : { found: 'is not text in UTF-8', allowed };
  } catch (error) {
    const code = (error as { code?: string }).code ?? String(error);
    return { found: SYSTEM_WORDS[code] ?? `cannot be read (${code})`, allowed };
  }
}

/** Reads a file that is known to be readable text, into the tree at `path`. */
function readOne(file: string, at: Path, joining: Joining): unknown {
  const { tree, problems, sources } = joining;
  const shown = shownName(file);
  sources.push(file);
  const placeAt = (line: number, column: number): Place => ({ file: shown, line, column });
  const resolveText = (name: string, path: Path): Section | null => section(name, path, { ...joining, file });
  const value = readYaml(readFileSync(file, 'utf8'), at, {
    tree, problems, placeAt,
    ...(at.length === 0 ? { resolve: resolveText } : {}),
  });
  if (value === null) {
    const empty = { key: at.join('.'), found: 'is empty', allowed: 'must hold keys and values' };
    problems.push(problemAt({ file: shown, line: null, column: null }, empty));
    tree.unread.push(at);
    return undefined;
  }
  return value;
}

interface Section {
  readonly value: unknown;
}

/** What a file holds that a section names; null for text that is no section. */
function section(name: string, at: Path, joining: Joining & { readonly file: string }): Section | null {
  const { tree, problems, sources, file } = joining;
  if (at.length !== 1 || !SECTIONS.includes(String(at[0]))) return null;
  const named = resolve(dirname(file), name);
  const circle = named === file ? { found: 'is the trial itself', allowed: 'must be another file' } : null;
  const trouble = circle ?? troubleWith(named);
  if (trouble === null) return { value: readOne(named, at, { tree, problems, sources }) };
  const found = `names the file '${name}', which ${trouble.found}`;
  problems.push(problemAt(placeOf(tree, at), { key: at.join('.'), found, allowed: trouble.allowed }));
  tree.unread.push(at);
  return { value: undefined };
}
