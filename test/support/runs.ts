/** Runs of a trial for tests, without a run folder: what they come to, by every road. */
import type { Mission } from '../../messages/mission.ts';
import { runTrial, type Agents, type RunResult, type Watcher } from '../../hil-sim/run/run-trial.ts';
import { startSea } from '../../hil-sim/sea/advance.ts';
import { formatProblem, loadTrial } from '../../hil-sim/trial/load.ts';
import { missionsOf } from '../../hil-sim/trial/missions.ts';
import { seaPlan } from '../../hil-sim/trial/plan.ts';
import type { Trial } from '../../hil-sim/trial/schema.ts';

const ROOT = new URL('../..', import.meta.url).pathname;
export const SMOKE = `${ROOT}configs/trials/smoke.yaml`;
export const MARROW_BANK = `${ROOT}configs/trials/marrow-bank.yaml`;

export function trialFrom(path: string, options: { seed?: number; sets?: string[] } = {}): Trial {
  const loaded = loadTrial(path, options);
  if (!loaded.ok) throw new Error(loaded.problems.map(formatProblem).join('\n'));
  return loaded.trial;
}

/** The missions of a fleet of `size`: vehicles of the smoke trial's kind, round its loop. */
export function fleetTrial(size: number, seed = 7): Trial {
  const names = ['amber', 'cobalt', 'jade', 'ochre', 'umber', 'indigo', 'slate', 'coral'];
  const vehicles = names.slice(0, size).map((name, index) => {
    const bearingRad = (2 * Math.PI * index) / size;
    const metres = (value: number): string => `${value.toFixed(1)} m`;
    return `{ name: ${name}, start: { east: ${metres(300 * Math.sin(bearingRad))}, north: `
      + `${metres(300 * Math.cos(bearingRad))}, depth: 20 m, heading: ${((360 * index) / size + 90) % 360} deg } }`;
  });
  return trialFrom(SMOKE, { seed, sets: [`fleet.vehicles=[${vehicles.join(', ')}]`] });
}

export interface RunOfTrial {
  readonly trial: Trial;
  readonly ticks: number;
  readonly agents: Agents;
  readonly watchers?: readonly Watcher[];
  readonly signal?: AbortSignal;
}

/** Runs the real sea against the agents given. */
export function runOf({ trial, ticks, agents, watchers = [], signal }: RunOfTrial): Promise<RunResult> {
  return runTrial({ sea: startSea(seaPlan(trial)), agents, ticks, tickS: trial.tick, watchers, signal });
}

export function missionsFor(trial: Trial): Mission[] {
  return missionsOf(trial);
}
