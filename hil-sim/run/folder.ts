/**
 * The run folder: names as DESIGN fixes them. What a killed run leaves is readable to within a second:
 * rows and log lines are handed to the system at least that often, on each tick and by a timer.
 */
import { closeSync, existsSync, mkdirSync, openSync, readdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { missionsOf } from '../trial/missions.ts';
import type { Trial } from '../trial/schema.ts';
import { FRAMES_HEADER, frameRows } from './frames-csv.ts';
import { junitXml } from './junit.ts';
import { LOG_NAME, LOG_VERSION, LogWriter, writeAll } from './log.ts';
import type { Outcome } from './outcome.ts';
import type { TickRecord } from './record.ts';
import { TRACKS_HEADER, startTracksCsv, trackRows } from './tracks-csv.ts';

const FLUSH_MS = 400;
const BATCH_CHARS = 256 * 1024;

/** A folder that cannot be used for a run: the user's choice of place, or the system's refusal. */
export class FolderProblem extends Error {
  override readonly name = 'FolderProblem';
}

export interface RunFolder {
  readonly path: string;
  take(record: TickRecord): void;
  /** The run came to its end: writes outcome, report and test cases, closes everything. */
  close(outcome: Outcome, reportHtml: string): Promise<void>;
  /** The run failed: what is there stays readable. */
  abandon(): Promise<void>;
}

/** Opens a new or empty folder for a run; a folder that holds anything is refused. */
export function openRunFolder(path: string, trial: Trial, resolvedYaml: string): RunFolder {
  const at = (name: string): string => join(path, name);
  claim(path, at('trial.yaml'), resolvedYaml);
  const names = trial.fleet.vehicles.map((vehicle) => vehicle.name);
  const tracks = startTracksCsv(trial);
  const trackFile = openRows(at('tracks.csv'), TRACKS_HEADER);
  const frameFile = openRows(at('frames.csv'), FRAMES_HEADER);
  const logFile = openSync(at(LOG_NAME), 'wx');
  const log = new LogWriter(logFile);
  log.add(JSON.stringify({
    log: LOG_VERSION, title: trial.title, seed: trial.seed, tick_s: trial.tick, missions: missionsOf(trial),
  }));
  let flushedMs = -Infinity;
  const flush = (): void => {
    flushedMs = performance.now();
    trackFile.flush();
    frameFile.flush();
    log.flush();
  };
  flush();
  let failure: unknown = null;
  const timer = setInterval(() => {
    try {
      flush();
    } catch (error) {
      failure ??= error;
    }
  }, FLUSH_MS).unref();
  const end = async (): Promise<void> => {
    clearInterval(timer);
    try {
      flush();
      await log.finish();
    } finally {
      trackFile.close();
      frameFile.close();
      closeSync(logFile);
    }
  };
  return {
    path,
    take(record) {
      if (failure !== null) throw failure;
      trackFile.add(trackRows(tracks, record));
      if (record.hearings.length > 0) frameFile.add(frameRows(names, record.hearings));
      const { tick, senses, steers, changes } = record;
      log.add(JSON.stringify(changes.length === 0 ? { tick, senses, steers } : { tick, senses, steers, changes }));
      if (performance.now() - flushedMs >= FLUSH_MS) flush();
    },
    async close(outcome, reportHtml) {
      log.add(JSON.stringify({ end: true, ticks: outcome.ticks, digest: outcome.digest }));
      await end();
      writeFileSync(at('report.html'), reportHtml, { flag: 'wx' });
      writeFileSync(at('junit.xml'), junitXml(outcome), { flag: 'wx' });
      writeFileSync(at('outcome.json'), `${JSON.stringify(outcome, null, 2)}\n`, { flag: 'wx' });
    },
    abandon: end,
  };
}

/** Makes the folder this call's own: of two calls at once, one gets it. */
function claim(path: string, trialFile: string, resolvedYaml: string): void {
  try {
    mkdirSync(path, { recursive: true });
    if (readdirSync(path).length > 0) {
      const what = existsSync(trialFile) ? 'holds a run' : 'is not empty';
      throw new FolderProblem(`${path}: ${what}, but a run needs a new or empty folder`);
    }
    writeFileSync(trialFile, resolvedYaml, { flag: 'wx' });
  } catch (error) {
    if (error instanceof FolderProblem) throw error;
    const { code } = error as NodeJS.ErrnoException;
    throw new FolderProblem(`${path}: cannot be made a run folder (${code ?? String(error)})`);
  }
}

interface Rows {
  add(rows: string): void;
  flush(): void;
  close(): void;
}

/** A text file that is written in batches. */
function openRows(path: string, header: string): Rows {
  const file = openSync(path, 'wx');
  let waiting = `${header}\n`;
  const flush = (): void => {
    if (waiting === '') return;
    const rows = waiting;
    waiting = '';
    writeAll(file, Buffer.from(rows, 'utf8'));
  };
  return {
    add(rows) {
      waiting += rows;
      if (waiting.length >= BATCH_CHARS) flush();
    },
    flush,
    close: () => closeSync(file),
  };
}
