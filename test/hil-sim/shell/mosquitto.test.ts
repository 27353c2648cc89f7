/** An outside broker of the real kind: Debian's Mosquitto, started here on a free port of this machine. */
import { spawn, spawnSync, type ChildProcess } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { connect, createServer, type AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { DRYWAKE_PATH, build } from '../../support/build.ts';
import { waitUntil } from '../../support/process-runs.ts';
import { SMOKE } from '../../support/runs.ts';

const folder = mkdtempSync(join(tmpdir(), 'drywake-mosquitto-'));
let broker: ChildProcess | undefined;
let port = 0;

function freePort(): Promise<number> {
  return new Promise((resolve) => {
    const server = createServer().listen(0, '127.0.0.1', () => {
      const { port: found } = server.address() as AddressInfo;
      server.close(() => { resolve(found); });
    });
  });
}

function answers(): Promise<boolean> {
  return new Promise((resolve) => {
    const socket = connect(port, '127.0.0.1', () => { socket.destroy(); resolve(true); });
    socket.once('error', () => { resolve(false); });
  });
}

beforeAll(async () => {
  await build();
  port = await freePort();
  const config = join(folder, 'mosquitto.conf');
  writeFileSync(config, `listener ${port} 127.0.0.1\nallow_anonymous true\npersistence false\n`);
  const path = `${process.env['PATH'] ?? ''}:/usr/sbin`;
  broker = spawn('mosquitto', ['-c', config], { stdio: 'ignore', env: { ...process.env, PATH: path } });
  let up = false;
  await waitUntil(() => { void answers().then((yes) => { up = yes; }); return up; }, 10_000);
  expect(up, 'mosquitto is installed and starts').toBe(true);
}, 60_000);

afterAll(() => {
  broker?.kill();
  rmSync(folder, { recursive: true, force: true });
});

function outcomeOf(name: string, ...options: string[]): { digest: string; verdict: string } {
  const out = join(folder, name);
  const { status, stderr } = spawnSync(
    process.execPath, [DRYWAKE_PATH, 'bench', SMOKE, '--set', 'duration=6 min', '--out', out, ...options], { encoding: 'utf8' },
  );
  expect([0, 1], stderr).toContain(status);
  return JSON.parse(readFileSync(join(out, 'outcome.json'), 'utf8')) as { digest: string; verdict: string };
}

describe('a run over Mosquitto', () => {
  it('has the digest of the run in process, twice in a row', () => {
    const url = `mqtt://127.0.0.1:${port}`;
    const wanted = outcomeOf('in-process', '--in-process');
    expect(outcomeOf('first', '--broker', url)).toMatchObject({ digest: wanted.digest, verdict: wanted.verdict });
    expect(outcomeOf('second', '--broker', url).digest).toBe(wanted.digest);
  });

  it('that is not there is said in a line, with exit 3', () => {
    const { status, stderr } = spawnSync(
      process.execPath, [DRYWAKE_PATH, 'bench', SMOKE, '--out', join(folder, 'none'), '--broker', 'mqtt://127.0.0.1:1'], { encoding: 'utf8' },
    );
    expect(status).toBe(3);
    expect(stderr).toMatch(/broker/);
  });
});
