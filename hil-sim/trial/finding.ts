/** What is wrong between the keys of a trial: the key to change, and why. */
import type { Path } from './documents.ts';

export interface Finding {
  readonly path: Path;
  readonly message: string;
}
