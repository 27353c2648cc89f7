/** One trial, one seed, one digest: in process, over the embedded broker, over an outside one. */
import { spawn } from 'node:child_process';
import { beforeAll, describe, expect, it } from 'vitest';
import { inProcessAgents } from '../../hil-sim/run/in-process.ts';
import { joinBroker } from '../../hil-sim/shell/external-broker.ts';
import type { Trial } from '../../hil-sim/trial/schema.ts';
import { build } from '../support/build.ts';
import { BENCH, runOverProcesses } from '../support/process-runs.ts';
import { MARROW_BANK, SMOKE, missionsFor, runOf, trialFrom } from '../support/runs.ts';

const TICKS = 150;

beforeAll(build, 60_000);

async function digestInProcess(trial: Trial, ticks = TICKS, keepsMemory = false): Promise<string> {
  const result = await runOf({ trial, ticks, agents: inProcessAgents(missionsFor(trial), keepsMemory) });
  if (!result.ok) throw new Error(result.reason);
  return result.digest;
}

describe('the digest of a run', () => {
  it.each([
    ['smoke', 1, SMOKE], ['smoke', 2, SMOKE], ['marrow-bank', 41, MARROW_BANK],
  ])('is the same in process and over the embedded broker: %s, seed %i', async (_name, seed, path) => {
    const trial = trialFrom(path, { seed });
    const { result, refused } = await runOverProcesses({ trial, ticks: TICKS });
    expect(result).toMatchObject({ ok: true, digest: await digestInProcess(trial) });
    expect(Object.values(refused).every((count) => count === 0)).toBe(true);
  });

  it('is the same over an outside broker with QoS 1', async () => {
    const trial = trialFrom(SMOKE, { seed: 3 });
    const outside = spawn(process.execPath, [new URL('../support/broker-process.mjs', import.meta.url).pathname], {
      stdio: ['pipe', 'pipe', 'inherit'],
    });
    const port = await new Promise<string>((resolve) => {
      outside.stdout.setEncoding('utf8').once('data', (text: string) => { resolve(text.trim()); });
    });
    const vehicles = trial.fleet.vehicles.map(({ name }) => name);
    const bus = await joinBroker({ url: `mqtt://127.0.0.1:${port}`, bench: BENCH, vehicles, qos: 1 });
    const { result } = await runOverProcesses({ trial, ticks: TICKS, bus, qos: 1 });
    expect(result).toMatchObject({ ok: true, digest: await digestInProcess(trial) });
    outside.stdin.end();
  });

  it('is the same where the script reboots agents, with their memory lost and kept', async () => {
    const trial = trialFrom(SMOKE, { seed: 4, sets: [
      'faults.+={ at: 40 s, for: 30 s, kind: reboot, vehicle: amber }',
      'faults.+={ at: 80 s, for: 20 s, kind: reboot, vehicle: [cobalt, jade], memory: kept }',
      'faults.+={ at: 110 s, for: 5 s, kind: reboot, vehicle: amber, memory: lost }',
    ] });
    const ticks = 140;
    const { result, refused } = await runOverProcesses({ trial, ticks, more: { keepsMemory: true } });
    expect(result).toMatchObject({ ok: true, ticks, digest: await digestInProcess(trial, ticks, true) });
    expect(Object.values(refused).every((count) => count === 0)).toBe(true);
    // The memory matters: without one, the same script comes to something else.
    expect(await digestInProcess(trial, ticks, false)).not.toBe(await digestInProcess(trial, ticks, true));
  });
});
