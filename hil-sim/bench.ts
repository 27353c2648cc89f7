/** `drywake bench`: a trial from its file to a verdict, a run folder and an exit status. */
import { basename, extname, join } from 'node:path';
import { benchNameFrom, isBenchName } from '../messages/topics.ts';
import { complain } from './complain.ts';
import { startProgress } from './progress.ts';
import { roadProblem, withAgents, type RoadOptions } from './road.ts';
import { FolderProblem, openRunFolder, type RunFolder } from './run/folder.ts';
import { finishMeasures } from './run/measure-report.ts';
import { startMeasures, takeTick } from './run/measure.ts';
import { buildOutcome, outcomeLines, type Outcome } from './run/outcome.ts';
import { renderReport } from './run/report.ts';
import { runTrial, type Watcher } from './run/run-trial.ts';
import { seedLine, spreadLines, yardstickLines } from './run/spread.ts';
import { startSea } from './sea/advance.ts';
import { formatProblem, loadTrial } from './trial/load.ts';
import { seaPlan } from './trial/plan.ts';
import { resolvedYaml } from './trial/resolve.ts';
import type { Trial } from './trial/schema.ts';
import { version } from './version.ts';
import { runYardsticks } from './yardsticks.ts';

export interface BenchOptions extends RoadOptions {
  readonly out?: string;
  readonly seed?: number;
  readonly set: readonly string[];
  readonly bench?: string;
  readonly json?: boolean;
  readonly seeds?: readonly number[];
  readonly yardsticks?: boolean;
}

const EXIT = { met: 0, unmet: 1, usage: 2, failed: 3 } as const;

/** A folder of its own for this run: the trial's name, the seed, and when it began. */
function newRunFolder(name: string, seed: number): string {
  const began = new Date().toISOString().replace(/[-:]/g, '').replace(/\.\d+Z$/, 'Z');
  return join('runs', `${name}-${seed}-${began}-${process.pid}`);
}

/** The command that repeats this run, as a person would type it. */
function repeatCommand(trialPath: string, options: BenchOptions, trial: Trial): string {
  const quote = (text: string): string => (/^[\w./=:+-]+$/.test(text) ? text : `'${text.replaceAll("'", "'\\''")}'`);
  const sets = options.set.map((setting) => ` --set ${quote(setting)}`).join('');
  return `npx drywake bench ${quote(trialPath)} --seed ${trial.seed}${sets}`;
}

/** Runs the command and answers the exit status. */
export async function runBench(trialPath: string, options: BenchOptions): Promise<number> {
  const seeds = options.seeds ?? [options.seed];
  const sets = options.set;
  const loaded = loadTrial(trialPath, seeds[0] === undefined ? { sets } : { sets, seed: seeds[0] });
  if (!loaded.ok) {
    complain(loaded.problems.map(formatProblem));
    complain([`${loaded.problems.length} problem${loaded.problems.length === 1 ? '' : 's'}; nothing was run`]);
    return EXIT.usage;
  }
  const name = benchNameFrom(basename(trialPath, extname(trialPath)));
  const bench = options.bench ?? name;
  if (!isBenchName(bench)) {
    complain([`--bench ${bench}: must be lower-case letters, digits, - or _, 64 at most`]);
    return EXIT.usage;
  }
  const problem = roadProblem(options, loaded.trial);
  if (problem !== null) {
    complain([problem]);
    return EXIT.usage;
  }
  const outcomes: Outcome[] = [];
  const reports: string[] = [];
  for (const seed of seeds) {
    const trial = seed === undefined ? loaded.trial : { ...loaded.trial, seed };
    const path = options.out ?? newRunFolder(name, trial.seed);
    const folder = openFolder(options.seeds === undefined ? path : join(path, `seed-${trial.seed}`), trial);
    if (folder === null) return EXIT.usage;
    const repeat = repeatCommand(trialPath, options, trial);
    const outcome = await runInFolder({ trial, folder, bench, options, repeat });
    if (outcome === null) return EXIT.failed;
    outcomes.push(outcome);
    reports.push(join(folder.path, 'report.html'));
    if (options.seeds !== undefined && options.json !== true) process.stdout.write(`${seedLine(outcome)}\n`);
  }
  print(outcomes, options);
  if (options.json !== true) process.stdout.write(`\n${reports.map((report) => `Report: ${report}\n`).join('')}`);
  return outcomes.every(({ verdict }) => verdict === 'pass') ? EXIT.met : EXIT.unmet;
}

function openFolder(path: string, trial: Trial): RunFolder | null {
  try {
    return openRunFolder(path, trial, resolvedYaml(trial));
  } catch (error) {
    if (!(error instanceof FolderProblem)) throw error;
    complain([error.message]);
    return null;
  }
}

/** The outcome of one run as it stands in its folder, or the spread over seeds. */
function print(outcomes: readonly Outcome[], options: BenchOptions): void {
  const [first] = outcomes;
  if (first === undefined) return;
  if (options.json === true) {
    process.stdout.write(`${JSON.stringify(options.seeds === undefined ? first : outcomes, null, 2)}\n`);
  } else if (options.seeds !== undefined) {
    process.stdout.write(`${spreadLines(outcomes).join('\n')}\n`);
  } else {
    process.stdout.write(`${[...outcomeLines(first), ...yardstickLines(first)].join('\n')}\n`);
  }
}

interface Job {
  readonly trial: Trial;
  readonly folder: RunFolder;
  readonly bench: string;
  readonly options: BenchOptions;
  readonly repeat: string;
}

/** One run to its outcome, written to its folder; null if the bench failed. */
async function runInFolder(job: Job): Promise<Outcome | null> {
  const { trial, folder, options } = job;
  const sea = startSea(seaPlan(trial));
  const measures = startMeasures(trial, sea.currentAt);
  const watchers: Watcher[] = [{ take: (record) => takeTick(measures, record) }, folder];
  const progress = startProgress();
  const result = await withAgents(job, (agents, signal) => runTrial({
    sea, agents, watchers, signal,
    ticks: Math.round(trial.duration / trial.tick),
    tickS: trial.tick,
    onProgress: (tick, ticks) => {
      progress.show(tick / ticks, `${trial.title}, seed ${trial.seed}, tick ${tick} of ${ticks}`);
    },
  }));
  progress.end();
  if (!result.ok) {
    await folder.abandon();
    const who = result.vehicle === null ? '' : ` (vehicle ${result.vehicle})`;
    complain([
      `the bench failed at tick ${result.tick}${who}: ${result.reason}`,
      `${folder.path} is readable to there`,
    ]);
    return null;
  }
  const report = finishMeasures(measures);
  const yardsticks = options.yardsticks === true ? await runYardsticks(trial) : undefined;
  const outcome = buildOutcome({
    trial, report, repeat: job.repeat, digest: result.digest, ticks: result.ticks, wall_s: result.wallS,
    version: version(), node: process.version, ...(yardsticks === undefined ? {} : { yardsticks }),
  });
  await folder.close(outcome, renderReport({ trial, outcome, report }));
  return outcome;
}
