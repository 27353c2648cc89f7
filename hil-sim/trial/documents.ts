/**
 * YAML files joined into one tree, with the place of every key kept: a section may be a path to
 * another file, relative to the file that names it; `--set` changes the tree after joining.
 */
import { readFileSync, statSync } from 'node:fs';
import { dirname, relative, resolve } from 'node:path';
import { LineCounter, isMap, isScalar, isSeq, parseDocument, type Node } from 'yaml';
import type { Problem } from './problem.ts';

export interface Place {
  readonly file: string;
  readonly line: number | null;
  readonly column: number | null;
}

/** A tree of plain values and, for each key path (joined by \0), where it stands. */
export interface Tree {
  value: unknown;
  readonly places: Map<string, Place>;
  readonly keyPlaces: Map<string, Place>;
}

export type Path = readonly (string | number)[];

const SECTIONS = ['mission', 'fleet', 'onboard', 'water', 'modem', 'faults', 'orders', 'limits'];
const FILE_BYTES_MAX = 4 * 1024 * 1024;
const FILES_DEEP_MAX = 8;

export const pathKey = (path: Path): string => path.join('\0');

/** The place of a path, or of the nearest parent that has one. */
export function placeOf(tree: Tree, path: Path, preferKey = false): Place {
  for (let length = path.length; length >= 0; length--) {
    const key = pathKey(path.slice(0, length));
    const place =
      (preferKey && length === path.length ? tree.keyPlaces.get(key) : undefined) ?? tree.places.get(key);
    if (place !== undefined) return place;
  }
  return { file: '', line: null, column: null };
}

/** Reads a trial and the files that its sections name; problems are added to `problems`. */
export function readTree(path: string, problems: Problem[]): Tree {
  const tree: Tree = { value: undefined, places: new Map(), keyPlaces: new Map() };
  tree.value = readFile(resolve(path), { tree, at: [], problems, chain: [] });
  return tree;
}

interface Reading {
  readonly tree: Tree;
  readonly at: Path;
  readonly problems: Problem[];
  /** Files being read, outermost first. */
  readonly chain: readonly string[];
}

/** The name that a person knows a file by: relative to where they stand, if that is shorter. */
function shownName(path: string): string {
  const near = relative(process.cwd(), path);
  return near !== '' && near.length < path.length ? near : path;
}

function readText(path: string): { text: string } | { trouble: string } {
  try {
    const stat = statSync(path);
    if (stat.isDirectory()) return { trouble: 'is a folder, but must be a YAML file' };
    if (stat.size > FILE_BYTES_MAX) return { trouble: 'is larger than 4 MiB, but must be a trial file' };
    const text = readFileSync(path, 'utf8');
    if (/[\0\ufffd]/.test(text)) return { trouble: 'is not text in UTF-8' };
    return { text };
  } catch (error) {
    const { code } = error as { code?: string };
    return { trouble: code === 'ENOENT' ? 'does not exist' : `cannot be read (${code ?? String(error)})` };
  }
}

function readFile(path: string, reading: Reading): unknown {
  const file = shownName(path);
  const report = (message: string, place: Place = { file, line: null, column: null }): undefined => {
    reading.problems.push({ ...place, key: reading.at.join('.'), message });
    return undefined;
  };
  if (reading.chain.includes(path)) return report('names itself, by way of other files');
  if (reading.chain.length >= FILES_DEEP_MAX) return report('is named by files more than 8 deep');
  const read = readText(path);
  if ('trouble' in read) return report(read.trouble);
  const lines = new LineCounter();
  const document = parseDocument(read.text, { lineCounter: lines, uniqueKeys: true, merge: false });
  for (const error of [...document.errors, ...document.warnings]) {
    const { line, col } = lines.linePos(error.pos[0]);
    const message = `YAML: ${error.message.split('\n')[0]!.replace(/ at line \d+, column \d+:?$/, '')}`;
    report(message, { file, line, column: col });
  }
  if (document.errors.length > 0) return undefined;
  if (document.contents === null) return report('is empty, but must hold keys and values');
  reading.tree.places.set(pathKey(reading.at), { file, line: 1, column: 1 });
  return walk(document.contents as Node, {
    ...reading,
    chain: [...reading.chain, path],
    file,
    path,
    lines,
    report,
  });
}

interface Walking extends Reading {
  readonly file: string;
  readonly path: string;
  readonly lines: LineCounter;
  readonly report: (message: string, place?: Place) => undefined;
}

function placeIn(walking: Walking, node: Node): Place {
  const { line, col } = walking.lines.linePos(node.range?.[0] ?? 0);
  return { file: walking.file, line, column: col };
}

function walk(node: Node | null, walking: Walking): unknown {
  if (node === null) return null;
  const { tree, at } = walking;
  if (!tree.places.has(pathKey(at)) || at.length > 0) tree.places.set(pathKey(at), placeIn(walking, node));
  if (isMap(node)) {
    const value: Record<string, unknown> = {};
    for (const pair of node.items) {
      const keyNode = pair.key as Node;
      const key = isScalar(keyNode) ? String(keyNode.value) : String(keyNode);
      const path = [...at, key];
      tree.keyPlaces.set(pathKey(path), placeIn(walking, keyNode));
      Object.defineProperty(value, key, {
        value: walkSection(pair.value as Node | null, { ...walking, at: path }),
        enumerable: true,
        writable: true,
        configurable: true,
      });
    }
    return value;
  }
  if (isSeq(node))
    return node.items.map((item, index) => walk(item as Node, { ...walking, at: [...at, index] }));
  if (isScalar(node)) return node.value;
  return walking.report('is an alias, but values are written out here', placeIn(walking, node));
}

/** A section of a trial, or the file that it names. */
function walkSection(node: Node | null, walking: Walking): unknown {
  const { at } = walking;
  const isSection = at.length === 1 && SECTIONS.includes(String(at[0]));
  if (!isSection || node === null || !isScalar(node) || typeof node.value !== 'string')
    return walk(node, walking);
  const before = walking.problems.length;
  const value = readFile(resolve(dirname(walking.path), node.value), walking);
  if (walking.problems.length > before && value === undefined) {
    const place = placeIn(walking, node);
    walking.problems.push({
      ...place,
      key: at.join('.'),
      message: `names the file '${node.value}', which cannot be used`,
    });
  }
  return value;
}
