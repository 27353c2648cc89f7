/** What the schema of a trial allows at a key path: its keys, its kinds, its description in words. */
import { z } from 'zod';
import { trialSchema } from './schema.ts';
import type { Path } from './tree.ts';

type Schema = z.core.$ZodType;

interface SchemaDef {
  readonly innerType?: Schema;
  readonly element?: Schema;
  readonly shape?: Readonly<Record<string, Schema>>;
  readonly options?: readonly Schema[];
  readonly values?: readonly unknown[];
  readonly discriminator?: string;
}

function defOf(schema: Schema): SchemaDef {
  return schema._zod.def as unknown as SchemaDef;
}

function unwrapped(schema: Schema): Schema {
  let inner = schema;
  for (let next = defOf(inner).innerType; next !== undefined; next = defOf(inner).innerType) inner = next;
  return inner;
}

function kindOf(option: Schema, discriminator: string): string {
  const literal = defOf(option).shape?.[discriminator];
  return literal === undefined ? '' : String(defOf(literal).values?.[0] ?? '');
}

/** The value at a path of plain values. */
export function valueAt(root: unknown, path: Path): unknown {
  let value = root;
  for (const step of path) {
    if (typeof value !== 'object' || value === null || !Object.hasOwn(value, step)) return undefined;
    value = (value as Record<string | number, unknown>)[step];
  }
  return value;
}

/** The schema at a path, still wrapped in defaults; among kinds the one that the tree says. */
function schemaAt(path: Path, root: unknown): Schema | null {
  let schema: Schema = trialSchema;
  for (let index = 0; index < path.length; index++) {
    const { element, shape, options, discriminator } = defOf(unwrapped(schema));
    if (discriminator !== undefined && options !== undefined) {
      const kind = valueAt(root, [...path.slice(0, index), discriminator]);
      const option = options.find((candidate) => kindOf(candidate, discriminator) === kind);
      const next = option === undefined ? undefined : defOf(option).shape?.[String(path[index])];
      if (next === undefined) return null;
      schema = next;
      continue;
    }
    const step = path[index]!;
    const next = element ?? (shape !== undefined && Object.hasOwn(shape, step) ? shape[step] : undefined);
    if (next === undefined) return null;
    schema = next;
  }
  return schema;
}

/** The keys that are allowed at a path; none if it holds no group of keys. */
export function keysAt(path: Path, root: unknown): string[] {
  const schema = schemaAt(path, root);
  if (schema === null) return [];
  const { shape, options, discriminator } = defOf(unwrapped(schema));
  if (discriminator === undefined) return Object.keys(shape ?? {});
  const kind = valueAt(root, [...path, discriminator]);
  const option = options?.find((candidate) => kindOf(candidate, discriminator) === kind);
  return option === undefined ? [] : Object.keys(defOf(option).shape ?? {});
}

/** The kinds that are allowed for the list item at a path; none if it has no kinds. */
export function kindsAt(path: Path, root: unknown): string[] {
  const schema = schemaAt(path, root);
  const { options, discriminator } = schema === null ? {} as SchemaDef : defOf(unwrapped(schema));
  return discriminator === undefined ? [] : (options ?? []).map((option) => kindOf(option, discriminator));
}

/** What the schema says of the value at a path, or null; not what it says of the value's absence. */
export function descriptionAt(path: Path, root: unknown): string | null {
  let says: string | null = null;
  for (let schema = schemaAt(path, root); schema !== null; schema = defOf(schema).innerType ?? null) {
    says = z.globalRegistry.get(schema as z.ZodType)?.description ?? says;
  }
  return says;
}
