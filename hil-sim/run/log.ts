/**
 * `log.ndjson.gz`: one JSON value a line, in gzip members that each hold whole lines.
 *
 * First line `{"log":1,"title":…,"seed":…,"tick_s":…,"missions":[…]}`: all that agents are told before
 * they start, in fleet order. Then a line a tick, `{"tick":n,"senses":[…],"steers":[…]}`, both in fleet
 * order. Last, if the run came to its end, `{"end":true,"ticks":n,"digest":"…"}`. Other lines may come
 * between ticks; a reader passes over what it does not know.
 *
 * Members are compressed beside the run, on the thread pool, and written in order. If the pool falls
 * behind, the run waits for a member now and then, so that memory stays bounded.
 */
import { createReadStream, writeSync } from 'node:fs';
import { join } from 'node:path';
import { constants, createGunzip, gzip, gzipSync } from 'node:zlib';
import type { Mission } from '../../messages/mission.ts';
import type { Sense } from '../../messages/sense.ts';
import type { Change } from '../sea/faults.ts';
import type { Steer } from '../../messages/steer.ts';

export const LOG_NAME = 'log.ndjson.gz';
export const LOG_VERSION = 1;

const MEMBER_BYTES = 512 * 1024;
const PENDING_BYTES_MOST = 32 * 1024 * 1024;

export interface LogStart {
  readonly log: number;
  readonly title: string;
  readonly seed: number;
  readonly tick_s: number;
  readonly missions: readonly Mission[];
}

export interface LogTick {
  readonly tick: number;
  readonly senses: readonly (Sense | null)[];
  readonly steers: readonly (Steer | null)[];
  /** Faults and orders that took effect, by their place in the trial. */
  readonly changes?: readonly Change[];
}

export interface LogEnd {
  readonly end: true;
  readonly ticks: number;
  readonly digest: string;
}

export type LogLine = LogStart | LogTick | LogEnd;

/** A member in the making: its bytes once they are there. */
interface Member {
  bytes: Buffer | null;
}

/** Writes lines to an open file as gzip members. */
export class LogWriter {
  readonly #file: number;
  #lines: string[] = [];
  #chars = 0;
  #pendingBytes = 0;
  #members: Member[] = [];
  #failure: Error | null = null;
  #whenEmpty: (() => void) | null = null;

  constructor(file: number) {
    this.#file = file;
  }

  add(line: string): void {
    this.#lines.push(line);
    this.#chars += line.length + 1;
    if (this.#chars >= MEMBER_BYTES) this.flush();
  }

  /** Closes the member in the making; throws what went wrong with an earlier one. */
  flush(): void {
    if (this.#failure !== null) throw this.#failure;
    if (this.#lines.length === 0) return;
    const plain = Buffer.from(this.#lines.join('\n') + '\n', 'utf8');
    this.#lines = [];
    this.#chars = 0;
    const member: Member = { bytes: null };
    this.#members.push(member);
    if (this.#pendingBytes > PENDING_BYTES_MOST) {
      member.bytes = gzipSync(plain, { level: constants.Z_BEST_SPEED });
      return;
    }
    this.#pendingBytes += plain.length;
    const chunkSize = Math.max(1024, plain.length >> 1);
    gzip(plain, { level: constants.Z_BEST_SPEED, chunkSize }, (error, bytes) => {
      this.#pendingBytes -= plain.length;
      this.#failure ??= error;
      member.bytes = bytes ?? Buffer.alloc(0);
      this.#writeReady();
    });
  }

  #writeReady(): void {
    let count = 0;
    try {
      while (this.#members[count]?.bytes != null) writeAll(this.#file, this.#members[count++]!.bytes!);
    } catch (error) {
      this.#failure ??= error as Error;
    }
    this.#members.splice(0, count);
    if (this.#members.length === 0 || this.#failure !== null) this.#whenEmpty?.();
  }

  /** Flushes, and waits until everything is in the file. */
  async finish(): Promise<void> {
    this.flush();
    this.#writeReady();
    while (this.#members.length > 0 && this.#failure === null) {
      await new Promise<void>((resolve) => {
        this.#whenEmpty = resolve;
      });
    }
    if (this.#failure !== null) throw this.#failure;
  }
}

/** Writes all of `bytes`, whatever the system takes at once. */
export function writeAll(file: number, bytes: Uint8Array): void {
  let done = 0;
  while (done < bytes.length) done += writeSync(file, bytes, done);
}

const NEWLINE = 0x0a;

/**
 * Reads the log of a run folder, line by line. A log that was cut short is read to its last whole line:
 * at least every whole member of it. A damaged one throws.
 */
export async function* readLog(folder: string): AsyncGenerator<LogLine, void, void> {
  const file = createReadStream(join(folder, LOG_NAME));
  const plain = createGunzip({ finishFlush: constants.Z_SYNC_FLUSH });
  file.on('error', (error) => plain.destroy(error));
  let rest: Buffer = Buffer.alloc(0);
  for await (const chunk of file.pipe(plain) as AsyncIterable<Buffer>) {
    let bytes: Buffer = rest.length === 0 ? chunk : Buffer.concat([rest, chunk]);
    for (let end = bytes.indexOf(NEWLINE); end >= 0; end = bytes.indexOf(NEWLINE)) {
      yield JSON.parse(bytes.toString('utf8', 0, end)) as LogLine;
      bytes = bytes.subarray(end + 1);
    }
    rest = bytes;
  }
}
