/**
 * Many seeds: trials drawn from a seed, faults then calm, and checkers that hold of any run. `npm test`
 * runs the first few; `npm run soak` starts at a seed from the commit, so that each looks elsewhere, and
 * runs many. DRYWAKE_SEED and DRYWAKE_RUNS choose. A failure writes the trial and prints the command
 * that repeats it.
 */
import { execFileSync } from 'node:child_process';
import { mkdtempSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { inProcessAgents } from '../../hil-sim/run/in-process.ts';
import { resolvedYaml } from '../../hil-sim/trial/resolve.ts';
import { missionsFor, runOf } from '../support/runs.ts';
import {
  agreesInTheEnd, countsAddUp, fitsTheContract, isFormedUpInTheEnd, keepsApart, staysInside,
} from './checkers.ts';
import { drawTrial, DURATION_S } from './drawn-trial.ts';

function firstSeed(): number {
  const given = process.env['DRYWAKE_SEED'] ?? '1';
  if (given !== 'commit') return Number(given);
  return parseInt(execFileSync('git', ['rev-parse', '--short=6', 'HEAD'], { encoding: 'utf8' }), 16);
}

const FIRST = firstSeed();
const RUNS = Number(process.env['DRYWAKE_RUNS'] ?? 6);
/** A few vehicle lengths, whatever is drawn; the trials' own limit is 30 m. */
const APART_M = 10;

describe(`the fleet, from seed ${FIRST} on`, () => {
  it.each(Array.from({ length: RUNS }, (_, index) => FIRST + index))('holds what must hold of any run, seed %i', async (seed) => {
    const { trial, words } = drawTrial(seed);
    const checkers = [
      fitsTheContract(), keepsApart(APART_M), staysInside(trial), countsAddUp(), agreesInTheEnd(), isFormedUpInTheEnd(trial),
    ];
    const keepsMemory = trial.faults.some((fault) => fault.kind === 'reboot' && fault.memory === 'kept');
    const result = await runOf({ trial, ticks: DURATION_S, agents: inProcessAgents(missionsFor(trial), keepsMemory), watchers: checkers });
    const findings = [
      ...(result.ok ? [] : [`the run failed at tick ${result.tick}: ${result.reason}`]),
      ...checkers.flatMap((checker) => checker.findings().map((finding) => `${checker.name}: ${finding}`)),
    ];
    if (findings.length > 0) {
      const path = join(mkdtempSync(join(tmpdir(), 'drywake-drawn-')), `drawn-${seed}.yaml`);
      writeFileSync(path, resolvedYaml(trial));
      findings.push(words, `again: DRYWAKE_SEED=${seed} DRYWAKE_RUNS=1 npm test -- test/fleet/many-seeds.test.ts`, `look at it: npx drywake bench ${path} --in-process`);
    }
    expect(findings).toEqual([]);
  });
});
