import { describe, expect, it } from 'vitest';
import { startProgress } from '../../hil-sim/progress.ts';

function stream(isTTY: boolean): { written: string; out: NodeJS.WriteStream } {
  const record = { written: '', out: undefined as unknown as NodeJS.WriteStream };
  record.out = { isTTY, write: (text: string) => { record.written += text; return true; } } as NodeJS.WriteStream;
  return record;
}

describe('startProgress', () => {
  it('says nothing on a pipe', () => {
    const pipe = stream(false);
    const progress = startProgress(pipe.out);
    progress.show(0.5, 'tick 10 of 20');
    progress.end();
    expect(pipe.written).toBe('');
  });

  it('draws one line on a terminal, at most five times a second, and clears it', () => {
    const terminal = stream(true);
    const progress = startProgress(terminal.out);
    for (let count = 0; count < 1000; count++) progress.show(0.5, 'tick 10 of 20');
    expect(terminal.written.match(/tick 10 of 20/g)).toHaveLength(1);
    expect(terminal.written).toContain('50 %');
    progress.end();
    expect(terminal.written.endsWith('\r\x1b[2K')).toBe(true);
  });
});
