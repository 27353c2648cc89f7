/** Plain values joined from several files and options, with the place of every key kept. */

export interface Place {
  readonly file: string;
  /** From 1; null where there are no lines, as in an option. */
  readonly line: number | null;
  readonly column: number | null;
}

export type Path = readonly (string | number)[];

export interface Tree {
  value: unknown;
  /** Where each value and each key stands, by `pathKey`. */
  readonly places: Map<string, Place>;
  readonly keyPlaces: Map<string, Place>;
  /** Paths whose value could not be read; what is missing there is no second mistake. */
  readonly unread: Path[];
}

export function emptyTree(): Tree {
  return { value: undefined, places: new Map(), keyPlaces: new Map(), unread: [] };
}

export const pathKey = (path: Path): string => path.join('\0');

/** Whether `path` is `outer`, or lies in it. */
export function isWithin(path: Path, outer: Path): boolean {
  return outer.every((step, index) => index < path.length && String(path[index]) === String(step));
}

/** The place of a path, or of the nearest parent that has one. */
export function placeOf(tree: Tree, path: Path, atKey = false): Place {
  for (let length = path.length; length >= 0; length--) {
    const key = pathKey(path.slice(0, length));
    const ofKey = atKey && length === path.length ? tree.keyPlaces.get(key) : undefined;
    const place = ofKey ?? tree.places.get(key);
    if (place !== undefined) return place;
  }
  return { file: '', line: null, column: null };
}

/** Forgets the places of a value and of all in it; another value takes its place. */
export function forgetPlaces(tree: Tree, path: Path): void {
  const own = pathKey(path);
  for (const places of [tree.places, tree.keyPlaces]) {
    for (const key of [...places.keys()]) {
      if (key === own || key.startsWith(`${own}\0`)) places.delete(key);
    }
  }
  for (let index = tree.unread.length - 1; index >= 0; index--) {
    if (isWithin(tree.unread[index]!, path)) tree.unread.splice(index, 1);
  }
}
