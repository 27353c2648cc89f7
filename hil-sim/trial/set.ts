/** `--set path=value`: changes one key of the joined tree; the value is read as YAML. */
import { problemAt, type Problem } from './problem.ts';
import { oneOf } from './spelling.ts';
import { forgetPlaces, pathKey, type Path, type Place, type Tree } from './tree.ts';
import { readYaml } from './yaml-text.ts';

const FORM = "must be path=value, e.g. mission.sharing=solo or fleet.vehicles.amber.compass.bias='2 deg'";

const SHOWN_MOST = 120;

type Holder = Record<string | number, unknown>;

/** Applies one `--set`; what is wrong with it is added to `problems`. */
export function applySet(tree: Tree, setting: string, problems: Problem[]): void {
  const option = setting.length > SHOWN_MOST ? `${setting.slice(0, SHOWN_MOST - 1)}…` : setting;
  const place: Place = { file: `--set ${option}`, line: null, column: null };
  const cut = setting.indexOf('=');
  const steps = cut < 0 ? [] : setting.slice(0, cut).trim().split('.');
  const refuse = (found: string, allowed: string): void => {
    problems.push(problemAt(place, { key: steps.join('.'), found, allowed }));
  };
  if (cut < 0) return refuse('has no \'=\'', FORM);
  if (steps.some((step) => step === '' || step === '__proto__')) return refuse('is no key path', FORM);
  const found = findHolder(tree, steps, place);
  if ('trouble' in found) return refuse(found.trouble, found.allowed);
  const path = [...found.path, found.key];
  forgetPlaces(tree, path);
  const value = readYaml(setting.slice(cut + 1), path, { tree, problems, placeAt: () => place });
  tree.places.set(pathKey(path), place);
  tree.keyPlaces.set(pathKey(path), place);
  found.holder[found.key] = value;
}

type Found =
  | { readonly holder: Holder; readonly key: string | number; readonly path: Path }
  | { readonly trouble: string; readonly allowed: string };

/** The list or group that holds the last step; groups and lists on the way are made if they are missing. */
function findHolder(tree: Tree, steps: readonly string[], place: Place): Found {
  let holder = tree.value as Holder;
  const path: (string | number)[] = [];
  for (let index = 0; ; index++) {
    const step = steps[index]!;
    const key = Array.isArray(holder) ? listIndex(holder, step) : step;
    if (key === null) return noItem(holder as unknown as unknown[], step, path);
    if (index === steps.length - 1) return { holder, key, path };
    path.push(key);
    const inner = Object.hasOwn(holder, key) ? holder[key] : undefined;
    if (inner === undefined || inner === null) {
      holder[key] = /^(\+|\d+)$/.test(steps[index + 1]!) ? [] : {};
      tree.places.set(pathKey(path), place);
      tree.keyPlaces.set(pathKey(path), place);
    } else if (typeof inner !== 'object') {
      return { trouble: `goes into ${path.join('.')}, which is a single value`, allowed: 'must end there' };
    }
    holder = holder[key] as Holder;
  }
}

/** The index of a list item by number, by its `name`, or past the end by `+`; null if there is none. */
function listIndex(list: readonly unknown[], step: string): number | null {
  if (step === '+') return list.length;
  if (/^\d+$/.test(step)) return Number(step) < list.length ? Number(step) : null;
  const index = list.findIndex((item) => nameOf(item) === step);
  return index < 0 ? null : index;
}

function nameOf(item: unknown): unknown {
  return (item as { name?: unknown } | null | undefined)?.name;
}

function noItem(list: readonly unknown[], step: string, path: Path): Found {
  const names = list.map(nameOf).filter((name) => typeof name === 'string');
  const numbers = list.length === 0 ? [] : [list.length === 1 ? '0' : `0 to ${list.length - 1}`];
  return {
    trouble: `names '${step}', which is no item of ${path.join('.')}`,
    allowed: `must be ${oneOf([...names, ...numbers, '+ to append'])}`,
  };
}
