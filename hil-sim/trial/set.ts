/** `--set path=value`: changes one key of the joined tree, read as YAML. */
import { parseDocument } from 'yaml';
import { pathKey, type Tree } from './documents.ts';
import type { Problem } from './problem.ts';

const FORM = "but must be path=value, e.g. mission.sharing=solo or fleet.vehicles.amber.compass.bias='2 deg'";

/** Applies one `--set`; what is wrong with it is added to `problems`. */
export function applySet(tree: Tree, setting: string, problems: Problem[]): void {
  const file = `--set ${setting}`;
  const report = (key: string, message: string): void => {
    problems.push({ file, line: null, column: null, key, message });
  };
  const cut = setting.indexOf('=');
  if (cut < 1) return report('', `has no '=', ${FORM}`);
  const steps = setting.slice(0, cut).trim().split('.');
  if (steps.some((step) => step === '' || step === '__proto__'))
    return report('', `has an empty step, ${FORM}`);
  const document = parseDocument(setting.slice(cut + 1));
  if (document.errors.length > 0)
    return report(steps.join('.'), `the value is not YAML: ${document.errors[0]!.message.split('\n')[0]}`);
  const value: unknown = document.toJS({ maxAliasCount: 0 });
  const path: (string | number)[] = [];
  let parent: unknown = tree.value;
  for (let index = 0; index < steps.length; index++) {
    const step = steps[index]!;
    const isLast = index === steps.length - 1;
    const key = Array.isArray(parent) ? listIndex(parent, step) : step;
    if (key === null) {
      return report(
        steps.join('.'),
        `'${step}' is no item of ${steps.slice(0, index).join('.')}, but must be a number, a name, or '+' to append`,
      );
    }
    if (typeof parent !== 'object' || parent === null) {
      return report(
        steps.join('.'),
        `${steps.slice(0, index).join('.')} is a single value, so it has no '${step}'`,
      );
    }
    path.push(key);
    const holder = parent as Record<string | number, unknown>;
    if (isLast) holder[key] = value;
    else holder[key] ??= steps[index + 1] === '+' ? [] : {};
    parent = holder[key];
  }
  for (const known of [...tree.places.keys()]) {
    if (known === pathKey(path) || known.startsWith(`${pathKey(path)}\0`)) tree.places.delete(known);
  }
  tree.places.set(pathKey(path), { file, line: null, column: null });
  tree.keyPlaces.delete(pathKey(path));
}

/** The index of a list item by number, by its `name`, or past the end by `+`; null if there is none. */
function listIndex(list: readonly unknown[], step: string): number | null {
  if (step === '+') return list.length;
  if (/^\d+$/.test(step)) return Number(step) < list.length ? Number(step) : null;
  const index = list.findIndex((item) => (item as { name?: unknown } | null)?.name === step);
  return index < 0 ? null : index;
}
