/** A small good trial as text, changed and loaded: what tests of trial files share. */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { formatProblem, loadTrial } from '../../hil-sim/trial/load.ts';
import type { Trial } from '../../hil-sim/trial/schema.ts';

export const GOOD = `title: A test
duration: 10 min
datum: { lat: 58.4, lon: -9.5 }
mission:
  loop: { shape: circle, centre: { east: 0 m, north: 0 m }, radius: 300 m, turn: clockwise }
  keepIn: { shape: circle, centre: { east: 0 m, north: 0 m }, radius: 1000 m }
  recovery: { east: -600 m, north: 0 m }
  formedUp: { hold: 2 min }
fleet:
  vehicles:
    - { name: amber, start: { east: 0 m, north: 300 m } }
    - { name: cobalt, start: { east: 0 m, north: -300 m } }
water: {}
`;

/** The good trial with one part of its text changed. */
export function changed(from: string | RegExp, to: string, text = GOOD): string {
  const result = text.replace(from, to);
  if (result === text) throw new Error(`the trial has no ${String(from)}`);
  return result;
}

/** The good trial with lines after it; the first of them is line 14. */
export const after = (lines: string): string => `${GOOD}${lines}\n`;

/** A folder for trial files, gone when the tests are. */
export class TrialFolder {
  readonly path = mkdtempSync(join(tmpdir(), 'drywake-trials-'));

  write(name: string, text: string | Uint8Array): string {
    const path = join(this.path, name);
    writeFileSync(path, text);
    return path;
  }

  /** Every problem of a file as a person sees it, with the folder's name left out. */
  problemsAt(path: string, sets: readonly string[] = []): string[] {
    const loaded = loadTrial(path, { sets });
    return loaded.ok ? [] : loaded.problems.map((problem) =>
      formatProblem({ ...problem, file: problem.file.replace(/^(?!--).*\//, '') }));
  }

  problems(text: string | Uint8Array, sets: readonly string[] = []): string[] {
    return this.problemsAt(this.write('trial.yaml', text), sets);
  }

  trial(text: string, sets: readonly string[] = []): Trial {
    const loaded = loadTrial(this.write('trial.yaml', text), { sets });
    if (!loaded.ok) throw new Error(loaded.problems.map(formatProblem).join('\n'));
    return loaded.trial;
  }

  remove(): void {
    rmSync(this.path, { recursive: true, force: true });
  }
}
