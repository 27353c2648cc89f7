/**
 * An agent's memory in a file: its state as one piece, put in place whole, so that a crash in the middle
 * leaves the piece before. It is read by the same build that wrote it.
 */
import { existsSync, readFileSync, renameSync, writeFileSync } from 'node:fs';
import { deserialize, serialize } from 'node:v8';
import type { Memory } from './answering.ts';
import type { State } from './core/state.ts';

/** The memory at `path`; without `resume` what it holds is left unread. */
export function fileMemory(path: string, resume: boolean, onNote: (line: string) => void): Memory {
  return {
    read() {
      if (!resume || !existsSync(path)) return null;
      try {
        return deserialize(readFileSync(path)) as State;
      } catch {
        onNote(`${path} cannot be read as a memory; starting from the mission alone`);
        return null;
      }
    },
    keep(state) {
      writeFileSync(`${path}.new`, serialize(state));
      renameSync(`${path}.new`, path);
    },
  };
}
