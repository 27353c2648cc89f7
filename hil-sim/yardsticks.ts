/**
 * The bench's own yardsticks: the same trial and seed twice more, in process. `central`: every note
 * reaches every vehicle at once, unrounded. `known`: agents are given the true current; biases, fixes,
 * links for positions and faults stay. What a real run lacks to `central` is the price of its links;
 * what it lacks to `known` is the price of not knowing the water.
 */
import { finishMeasures } from './run/measure-report.ts';
import { startMeasures, takeTick } from './run/measure.ts';
import type { MeasureValues } from './run/measures.ts';
import { runTrial } from './run/run-trial.ts';
import { startSea } from './sea/advance.ts';
import { missionsOf } from './trial/missions.ts';
import { seaPlan } from './trial/plan.ts';
import type { Trial } from './trial/schema.ts';

export async function runYardsticks(trial: Trial): Promise<{ central: MeasureValues; known: MeasureValues }> {
  return { central: await runYardstick(trial, 'central'), known: await runYardstick(trial, 'known') };
}

async function runYardstick(trial: Trial, kind: 'central' | 'known'): Promise<MeasureValues> {
  const { yardstickAgents } = await import('./run/in-process.ts');
  const sea = startSea(seaPlan(trial));
  const measures = startMeasures(trial, sea.currentAt);
  const result = await runTrial({
    sea, agents: yardstickAgents(missionsOf(trial), sea, kind), tickS: trial.tick,
    ticks: Math.round(trial.duration / trial.tick),
    watchers: [{ take: (record) => takeTick(measures, record) }],
  });
  if (!result.ok) throw new Error(`the yardstick ${kind} failed at tick ${result.tick}: ${result.reason}`);
  return finishMeasures(measures).values;
}
