/**
 * YAML text to plain values, node by node, so that every key has a place. Values are written out:
 * an alias is a mistake, so a short text cannot stand for a huge one. Text that nests deeper than any
 * trial is refused before it is parsed, since the parser recurses.
 */
import {
  CST, Lexer, LineCounter, isMap, isScalar, isSeq, parseDocument, type Node, type YAMLMap,
} from 'yaml';
import { problemAt, type Problem } from './problem.ts';
import { pathKey, placeOf, type Path, type Place, type Tree } from './tree.ts';

const DEEPEST = 64;
/** Of the syntax errors of one text so many are told; the rest mostly follow from them. */
const ERRORS_TOLD = 20;
/** The parser's own checks of keys and its quotations of the text take quadratic time; ours do not. */
const PARSING = { uniqueKeys: false, prettyErrors: false, merge: false };

export interface Reading {
  readonly tree: Tree;
  readonly problems: Problem[];
  /** The place of a line and column of this text. */
  readonly placeAt: (line: number, column: number) => Place;
  /** What a scalar stands for, where it is more than itself: a section may be the name of a file. */
  readonly resolve?: (text: string, path: Path) => { readonly value: unknown } | null;
}

interface Walking extends Reading {
  readonly lines: LineCounter;
}

/** The value of a text that stands at `path` of the tree; undefined, with problems told, if it has none. */
export function readYaml(text: string, path: Path, reading: Reading): unknown {
  const { tree, problems } = reading;
  const lines = new LineCounter();
  const tell = (offset: number, found: string, allowed: string): void => {
    const { line, col } = lines.linePos(offset);
    problems.push(problemAt(reading.placeAt(line, col), { key: path.join('.'), found, allowed }));
  };
  const deepAt = tooDeepAt(text);
  if (deepAt !== null) {
    for (let at = 0; at >= 0; at = text.indexOf('\n', at) + 1 || -1) lines.addNewLine(at);
    tell(deepAt, `is nested more than ${DEEPEST} deep`, 'must be flatter');
    tree.unread.push(path);
    return undefined;
  }
  const document = parseDocument(text, { ...PARSING, lineCounter: lines });
  for (const error of [...document.errors, ...document.warnings].slice(0, ERRORS_TOLD)) {
    const isSecond = error.code === 'MULTIPLE_DOCS';
    if (isSecond) tell(error.pos[0], 'begins a second document', 'must be the only one');
    else tell(error.pos[0], `is not YAML: ${error.message.split('\n')[0]!}`, '');
  }
  if (document.errors.length > 0) {
    tree.unread.push(path);
    return undefined;
  }
  return walk(document.contents, path, { ...reading, lines });
}

/** Tokens of the lexer that stand for no text. */
const WIDTHLESS = ['doc-mode', 'flow-error-end', 'scalar'];

/** Where a text first nests too deep, counted generously: brackets, marks of one line, and its indent. */
function tooDeepAt(text: string): number | null {
  let offset = 0;
  let brackets = 0;
  let marks = 0;
  let isLineStart = true;
  for (const token of new Lexer().lex(text)) {
    const type = CST.tokenType(token) ?? 'text';
    if (type === 'flow-seq-start' || type === 'flow-map-start') brackets += 1;
    else if (type === 'flow-seq-end' || type === 'flow-map-end') brackets = Math.max(0, brackets - 1);
    else if (type === 'seq-item-ind' || type === 'explicit-key-ind') marks += 1;
    else if (type === 'map-value-ind') marks += 1;
    else if (type === 'newline' || type === 'comma') marks = 0;
    else if (type === 'space' && isLineStart && brackets === 0) marks = Math.floor(token.length / 2);
    if (brackets + marks > DEEPEST) return offset;
    isLineStart = type === 'newline';
    if (!WIDTHLESS.includes(type)) offset += token.length;
  }
  return null;
}

function placeIn(walking: Walking, node: Node | null): Place {
  const { line, col } = walking.lines.linePos(node?.range?.[0] ?? 0);
  return walking.placeAt(line, col);
}

function walk(node: Node | null, at: Path, walking: Walking): unknown {
  const { tree, problems } = walking;
  if (node === null) return null;
  tree.places.set(pathKey(at), placeIn(walking, node));
  if (isMap(node)) return walkMap(node, at, walking);
  if (isSeq(node)) {
    return node.items.map((item, index) => walk(item as Node | null, [...at, index], walking));
  }
  if (isScalar(node)) {
    const resolved = typeof node.value === 'string' ? walking.resolve?.(node.value, at) : undefined;
    return resolved ? resolved.value : node.value;
  }
  const alias = { key: at.join('.'), found: 'is an alias', allowed: 'must be written out' };
  problems.push(problemAt(placeIn(walking, node), alias));
  tree.unread.push(at);
  return undefined;
}

function walkMap(map: YAMLMap, at: Path, walking: Walking): Record<string, unknown> {
  const { tree, problems } = walking;
  const value: Record<string, unknown> = {};
  for (const pair of map.items) {
    const keyNode = pair.key as Node | null;
    const key = isScalar(keyNode) ? String(keyNode.value) : String(keyNode);
    const path = [...at, key];
    const place = placeIn(walking, keyNode);
    if (Object.hasOwn(value, key)) {
      const first = placeOf(tree, path, true).line;
      const found = `is given again${first === null ? '' : `, after line ${first}`}`;
      problems.push(problemAt(place, { key: path.join('.'), found, allowed: 'must be there once' }));
      continue;
    }
    tree.keyPlaces.set(pathKey(path), place);
    // `__proto__` is a key like any other here, and an unknown one.
    Object.defineProperty(value, key, {
      value: walk(pair.value as Node | null, path, walking),
      enumerable: true, writable: true, configurable: true,
    });
  }
  return value;
}
