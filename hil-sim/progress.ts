/** Progress of long work: one line on a terminal's standard error, nothing on a pipe. */

const REDRAW_MS = 200;

export interface Progress {
  /** Share done, 0 to 1, and what to say of it. */
  show(share: number, text: string): void;
  /** Clears the line, so that what follows starts clean. */
  end(): void;
}

const SILENT: Progress = { show: () => undefined, end: () => undefined };

/** Minutes and seconds, or hours and minutes, short. */
function short(seconds: number): string {
  if (seconds < 90) return `${Math.ceil(seconds)} s`;
  if (seconds < 5400) return `${Math.round(seconds / 60)} min`;
  return `${(seconds / 3600).toFixed(1)} h`;
}

/** A progress line on `stream`, if that is a terminal. */
export function startProgress(stream: NodeJS.WriteStream = process.stderr): Progress {
  if (!stream.isTTY) return SILENT;
  const startedMs = performance.now();
  let drawnMs = -Infinity;
  return {
    show(share, text) {
      const nowMs = performance.now();
      if (nowMs - drawnMs < REDRAW_MS) return;
      drawnMs = nowMs;
      const elapsedS = (nowMs - startedMs) / 1000;
      const left = share > 0.01 && elapsedS > 1 ? `, ${short(elapsedS / share - elapsedS)} left` : '';
      const width = 24;
      const done = Math.round(width * share);
      const bar = '='.repeat(done) + ' '.repeat(width - done);
      stream.write(`\r\x1b[2K[${bar}] ${(100 * share).toFixed(0).padStart(3)} %  ${text}${left}`);
    },
    end() {
      stream.write('\r\x1b[2K');
    },
  };
}
