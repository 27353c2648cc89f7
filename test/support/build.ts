/**
 * Compiled code for tests that start processes: what `npm run build` makes, made only if a source is
 * newer, and by one test process at a time.
 */
import { spawnSync } from 'node:child_process';
import { mkdirSync, readdirSync, rmdirSync, statSync } from 'node:fs';
import { join } from 'node:path';

const ROOT = new URL('../..', import.meta.url).pathname;
const LOCK = join(ROOT, 'node_modules', '.drywake-build');
const STALE_LOCK_MS = 120_000;

/** The compiled agent. */
export const AGENT_PATH = join(ROOT, 'dist/onboard/main.js');
/** The compiled command. */
export const DRYWAKE_PATH = join(ROOT, 'dist/hil-sim/drywake.js');
/** Program and arguments that start an agent tied to this process. */
export const AGENT_COMMAND = [process.execPath, AGENT_PATH, '--tied'];

const modifiedMs = (path: string): number => statSync(path, { throwIfNoEntry: false })?.mtimeMs ?? 0;

function isCurrent(): boolean {
  const newest = ['messages', 'onboard', 'hil-sim'].flatMap((folder) =>
    readdirSync(join(ROOT, folder), { recursive: true, encoding: 'utf8' })
      .filter((path) => path.endsWith('.ts'))
      .map((path) => modifiedMs(join(ROOT, folder, path))));
  return modifiedMs(AGENT_PATH) > Math.max(...newest) && modifiedMs(DRYWAKE_PATH) > 0;
}

function lock(): boolean {
  try {
    mkdirSync(LOCK);
    return true;
  } catch {
    if (Date.now() - modifiedMs(LOCK) > STALE_LOCK_MS) rmdirSync(LOCK);
    return false;
  }
}

/** Builds if need be; call it in `beforeAll`. */
export async function build(): Promise<void> {
  while (!isCurrent()) {
    if (!lock()) {
      await new Promise((resolve) => { setTimeout(resolve, 100); });
      continue;
    }
    try {
      if (isCurrent()) return;
      const { status, stdout } = spawnSync(join(ROOT, 'node_modules/.bin/tsc'), ['-p', 'tsconfig.json'], {
        cwd: ROOT, encoding: 'utf8',
      });
      if (status !== 0) throw new Error(`the product does not compile:\n${stdout}`);
    } finally {
      rmdirSync(LOCK);
    }
  }
}
