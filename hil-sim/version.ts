/** The version of this build, from the package it belongs to. */
import { readFileSync } from 'node:fs';

/** Looks for package.json from this file's folder upwards: the same from source and from dist/. */
export function version(): string {
  for (const up of ['../', '../../']) {
    try {
      const found = JSON.parse(readFileSync(new URL(up + 'package.json', import.meta.url), 'utf8')) as {
        name?: string; version?: string;
      };
      if (found.name === 'drywake' && found.version !== undefined) return found.version;
    } catch {
      // Not here; one folder further up.
    }
  }
  return 'unknown';
}
