/** The resolved trial as YAML: every default filled in, enough to repeat the run to the last bit. */
import { stringify } from 'yaml';
import { z } from 'zod';
import { trialSchema, type Trial } from './schema.ts';

const HEAD = '# A trial as it was run, every default filled in; drywake bench on this file repeats it.\n';

export function resolvedYaml(trial: Trial): string {
  return HEAD + stringify(z.encode(trialSchema, trial), { lineWidth: 0, aliasDuplicateObjects: false });
}
