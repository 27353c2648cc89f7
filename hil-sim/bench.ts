/** `drywake bench`: a trial from its file to a verdict, a run folder and an exit status. */
import { basename, extname, join } from 'node:path';
import type { Mission } from '../messages/mission.ts';
import { benchNameFrom, isBenchName } from '../messages/topics.ts';
import { startProgress } from './progress.ts';
import { FolderProblem, openRunFolder, type RunFolder } from './run/folder.ts';
import { finishMeasures } from './run/measure-report.ts';
import { startMeasures, takeTick } from './run/measure.ts';
import { buildOutcome, outcomeLines } from './run/outcome.ts';
import { renderReport } from './run/report.ts';
import { runTrial, type Agents, type RunResult, type Watcher } from './run/run-trial.ts';
import { startSea } from './sea/advance.ts';
import { formatProblem, loadTrial } from './trial/load.ts';
import { missionsOf } from './trial/missions.ts';
import { seaPlan } from './trial/plan.ts';
import { resolvedYaml } from './trial/resolve.ts';
import type { Trial } from './trial/schema.ts';
import { version } from './version.ts';

export interface BenchOptions {
  readonly inProcess?: boolean;
  readonly out?: string;
  readonly seed?: number;
  readonly set: readonly string[];
  readonly bench?: string;
  readonly json?: boolean;
}

const EXIT = { met: 0, unmet: 1, usage: 2, failed: 3 } as const;

function complain(lines: readonly string[]): void {
  for (const line of lines) process.stderr.write(`${line}\n`);
}

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
  const sets = options.set;
  const loaded = loadTrial(trialPath, options.seed === undefined ? { sets } : { sets, seed: options.seed });
  if (!loaded.ok) {
    complain(loaded.problems.map(formatProblem));
    complain([`${loaded.problems.length} problem${loaded.problems.length === 1 ? '' : 's'}; nothing was run`]);
    return EXIT.usage;
  }
  const { trial } = loaded;
  const name = benchNameFrom(basename(trialPath, extname(trialPath)));
  const bench = options.bench ?? name;
  if (!isBenchName(bench)) {
    complain([`--bench ${bench}: must be lower-case letters, digits, - or _, 64 at most`]);
    return EXIT.usage;
  }
  let folder: RunFolder;
  try {
    folder = openRunFolder(options.out ?? newRunFolder(name, trial.seed), trial, resolvedYaml(trial));
  } catch (error) {
    if (!(error instanceof FolderProblem)) throw error;
    complain([error.message]);
    return EXIT.usage;
  }
  return await runInFolder({ trial, folder, bench, options, repeat: repeatCommand(trialPath, options, trial) });
}

interface Job {
  readonly trial: Trial;
  readonly folder: RunFolder;
  readonly bench: string;
  readonly options: BenchOptions;
  readonly repeat: string;
}

async function runInFolder(job: Job): Promise<number> {
  const { trial, folder, options } = job;
  const sea = startSea(seaPlan(trial));
  const measures = startMeasures(trial, sea.currentAt);
  const watchers: Watcher[] = [{ take: (record) => takeTick(measures, record) }, folder];
  const progress = startProgress();
  const result = await withAgents(job, (agents, signal) => runTrial({
    sea, agents, watchers, signal,
    ticks: Math.round(trial.duration / trial.tick),
    tickS: trial.tick,
    onProgress: (tick, ticks) => progress.show(tick / ticks, `${trial.title}, seed ${trial.seed}, tick ${tick} of ${ticks}`),
  }));
  progress.end();
  if (!result.ok) {
    await folder.abandon();
    const who = result.vehicle === null ? '' : ` (vehicle ${result.vehicle})`;
    complain([`the bench failed at tick ${result.tick}${who}: ${result.reason}`, `${folder.path} is readable to there`]);
    return EXIT.failed;
  }
  const report = finishMeasures(measures);
  const outcome = buildOutcome({
    trial, report, repeat: job.repeat, digest: result.digest, ticks: result.ticks, wall_s: result.wallS,
    version: version(), node: process.version,
  });
  await folder.close(outcome, renderReport({ trial, outcome, report }));
  if (options.json === true) process.stdout.write(`${JSON.stringify(outcome, null, 2)}\n`);
  else process.stdout.write(`${[...outcomeLines(outcome), '', `Report: ${join(folder.path, 'report.html')}`].join('\n')}\n`);
  return outcome.verdict === 'pass' ? EXIT.met : EXIT.unmet;
}

/** Runs with agents in process or as processes of their own; they are gone when this returns. */
async function withAgents(
  job: Job, run: (agents: Agents, signal: AbortSignal) => Promise<RunResult>,
): Promise<RunResult> {
  const missions = missionsOf(job.trial);
  const stop = new AbortController();
  const onSignal = (): void => { stop.abort(); };
  process.once('SIGINT', onSignal).once('SIGTERM', onSignal);
  try {
    if (job.options.inProcess === true) {
      const { inProcessAgents } = await import('./run/in-process.ts');
      return await run(inProcessAgents(missions), stop.signal);
    }
    return await withProcesses(job, missions, (agents) => run(agents, stop.signal), stop.signal);
  } finally {
    process.removeListener('SIGINT', onSignal).removeListener('SIGTERM', onSignal);
  }
}

async function withProcesses(
  job: Job, missions: readonly Mission[], run: (agents: Agents) => Promise<RunResult>, signal: AbortSignal,
): Promise<RunResult> {
  const [{ startBroker }, { AgentTrouble, processAgents }] = await Promise.all([
    import('./shell/broker.ts'), import('./run/processes.ts'),
  ]);
  const bus = await startBroker();
  try {
    const agents = await processAgents({
      bus, bench: job.bench, missions, signal, onLine: (vehicle, line) => complain([`${vehicle}: ${line}`]),
    });
    try {
      return await run(agents);
    } finally {
      await agents.close();
    }
  } catch (error) {
    if (!(error instanceof AgentTrouble)) throw error;
    return { ok: false, reason: error.message, vehicle: error.vehicle, tick: 0, wallS: 0 };
  } finally {
    await bus.close();
  }
}
