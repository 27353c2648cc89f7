/** What is wrong at one key of a trial, before anyone knows in which file it stands. */
import type { Path } from './tree.ts';

/** Reads as one sentence: `found`, but `allowed`. */
export interface Finding {
  readonly path: Path;
  readonly found: string;
  /** Empty where nothing can be put in its place. */
  readonly allowed: string;
  /** Whether the place is that of the key, not of its value. */
  readonly atKey?: boolean;
}
