#!/usr/bin/env node
/** The command table: what each command is called, what it takes, and the exit status. Nothing else. */
import { Command, CommanderError, InvalidArgumentError, Option } from 'commander';
import { version } from './version.ts';

/** 0 limits met, 1 a limit not met, 2 bad input or usage, 3 the bench itself failed. */
const EXIT_USAGE = 2;
const EXIT_BENCH = 3;

const NOT_BUILT_COMMANDS: Record<string, string> = {
  sea: 'the sea alone, on any machine, joined by the broker',
  sweep: 'many trials over seeds and parameters',
  merge: 'joins the shards of a sweep',
  replay: 'steps an agent again from the recorded senses',
  pare: 'cuts a failing trial down to what makes it fail',
  brief: 'the go / no-go sheet for a mission over a forecast',
  watch: 'the live page',
  wire: 'real telemetry in and out',
};

const NOT_BUILT_BENCH_OPTIONS = [
  '--compare <what>', '--against <run>', '--watch', '--explain <what>',
];

function seedNumber(text: string): number {
  const seed = Number(text);
  if (!Number.isInteger(seed) || seed < 0 || seed > 2 ** 32 - 1) {
    throw new InvalidArgumentError('a seed is a whole number from 0 to 4294967295.');
  }
  return seed;
}

function paceFactor(text: string): number {
  const pace = Number(text);
  if (!(pace >= 0.01 && pace <= 10_000)) throw new InvalidArgumentError('a pace is a number from 0.01 to 10000.');
  return pace;
}

/** `1..10`, or `3,5,8`. */
function seedRange(text: string): number[] {
  const range = /^(\d+)\.\.(\d+)$/.exec(text);
  if (range === null) return text.split(',').map(seedNumber);
  const [first, last] = [seedNumber(range[1]!), seedNumber(range[2]!)];
  if (last < first || last - first >= 1000) {
    throw new InvalidArgumentError('a range runs upward, over 1000 seeds at most.');
  }
  return Array.from({ length: last - first + 1 }, (_, index) => first + index);
}

function refuse(what: string): never {
  process.stderr.write(`drywake: ${what} is not built yet\n`);
  process.exit(EXIT_USAGE);
}

const program = new Command('drywake')
  .description('Onboard module and bench for small fleets of underwater vehicles that hold a closed line in a\n'
    + 'current nobody has mapped. A dry run is advice, not clearance to launch; this is no\n'
    + 'collision-avoidance or safety system.')
  .version(version())
  .showHelpAfterError('(drywake --help says what there is)')
  .exitOverride();

const bench = program
  .command('bench')
  .description('run a trial: broker, sea and one agent process per vehicle; print the outcome, write the run folder')
  .argument('<trial>', 'trial file (YAML)')
  .option('--in-process', 'the same run without sockets or processes; same digest, faster')
  .option('--out <dir>', 'run folder (default: a new folder under runs/)')
  .option('--seed <n>', 'another seed than the trial\'s', seedNumber)
  .option('--seeds <range>', 'several seeds, 1..10 or 3,5,8: a line each, and the spread', seedRange)
  .option('--yardsticks', 'beside the run: every note shared at once (central), and the true current given (known)')
  .option('--set <path=value>', 'change a key of the trial, e.g. mission.sharing=solo; repeatable',
    (value: string, earlier: string[]) => [...earlier, value], [] as string[])
  .option('--bench <name>', 'name of the bench in topics (default: the trial\'s file name)')
  .option('--broker <url>', 'an outside broker in place of the embedded one, e.g. mqtt://192.0.2.7:1883')
  .option('--pace <factor>', 'against the wall clock, so many times as fast; late steers are counted', paceFactor)
  .option('--leave <name>', 'start no agent for this vehicle: wait for a foreign one; repeatable',
    (value: string, earlier: string[]) => [...earlier, value], [] as string[])
  .option('--restart', 'start a dead agent again, from its memory if it has one')
  .option('--json', 'print outcome.json, and nothing else, on standard output')
  .addHelpText('after', '\nExit status: 0 limits met, 1 a limit not met, 2 bad input or usage, '
    + '3 the bench itself failed.\n'
    + '\nExamples:\n  drywake bench configs/trials/marrow-bank.yaml\n'
    + '  drywake bench configs/trials/marrow-bank.yaml --in-process --seed 7 --set modem.link.loss="40 %"')
  .action(async (trial: string, options) => {
    const { runBench } = await import('./bench.ts');
    process.exitCode = await runBench(trial, options);
  });
for (const flags of NOT_BUILT_BENCH_OPTIONS) {
  bench.addOption(new Option(flags).hideHelp());
  bench.on(`option:${flags.split(' ')[0]!.slice(2)}`, () => refuse(flags.split(' ')[0]!));
}

program
  .command('onboard')
  .description('one agent alone, on any machine, joined to a bench by its broker')
  .requiredOption('--vehicle <name>', 'the vehicle that this agent steers')
  .requiredOption('--broker <url>', 'the broker that the bench uses, e.g. mqtt://192.0.2.7:1883')
  .requiredOption('--bench <name>', 'name of the bench in topics')
  .action(async (options: { vehicle: string; broker: string; bench: string }) => {
    const { runAgent } = await import('./onboard-command.ts');
    process.exitCode = await runAgent(options);
  });

for (const [name, description] of Object.entries(NOT_BUILT_COMMANDS)) {
  program.command(name, { hidden: true }).description(description).allowUnknownOption().allowExcessArguments()
    .action(() => refuse(`drywake ${name}`));
}

// A reader that has seen enough (`| head`) is no failure of ours.
process.stdout.on('error', (error: NodeJS.ErrnoException) => {
  if (error.code !== 'EPIPE') throw error;
});

try {
  await program.parseAsync();
} catch (error) {
  if (error instanceof CommanderError) {
    process.exitCode = error.exitCode === 0 ? 0 : EXIT_USAGE;
  } else {
    process.stderr.write(`drywake: the bench failed: ${error instanceof Error ? error.stack : String(error)}\n`);
    process.exitCode = EXIT_BENCH;
  }
}
