/**
 * One agent as a process: `--vehicle NAME --bench NAME --broker URL [--qos 0|1]`. Exit status: 0 the
 * sea ended the run, 2 bad usage, 3 the agent failed.
 */
import { parseArgs } from 'node:util';
import { isBenchName } from '../messages/topics.ts';
import { runShell, type ShellOptions } from './shell.ts';

const EXIT = { ended: 0, usage: 2, failed: 3 } as const;

function usage(message: string): never {
  process.stderr.write(`agent: ${message}\nusage: --vehicle NAME --bench NAME --broker URL [--qos 0|1]\n`);
  process.exit(EXIT.usage);
}

function readArguments(): ShellOptions {
  let values: { vehicle?: string; bench?: string; broker?: string; qos?: string };
  try {
    ({ values } = parseArgs({
      options: { vehicle: { type: 'string' }, bench: { type: 'string' }, broker: { type: 'string' }, qos: { type: 'string' } },
    }));
  } catch (error) {
    return usage(error instanceof Error ? error.message : String(error));
  }
  const { vehicle, bench, broker, qos = '0' } = values;
  if (vehicle === undefined || !/^[a-z][a-z0-9-]{0,23}$/.test(vehicle)) return usage('--vehicle must be a vehicle\'s name');
  if (bench === undefined || !isBenchName(bench)) return usage('--bench must be a bench\'s name');
  if (broker === undefined || !/^(mqtt|tcp|ws):\/\/./.test(broker)) return usage('--broker must be a URL like mqtt://127.0.0.1:1883');
  if (qos !== '0' && qos !== '1') return usage('--qos must be 0 or 1');
  return { vehicle, bench, broker, qos: qos === '0' ? 0 : 1 };
}

const options = readArguments();
const stop = new AbortController();
for (const signal of ['SIGINT', 'SIGTERM'] as const) process.once(signal, () => { stop.abort(); });
process.on('uncaughtException', (error) => {
  process.stderr.write(`agent ${options.vehicle} failed: ${error.stack ?? error.message}\n`);
  process.exit(EXIT.failed);
});

const end = await runShell(options, stop.signal);
if (!end.ok) process.stderr.write(`agent ${options.vehicle}: ${end.reason}\n`);
process.exit(end.ok ? EXIT.ended : EXIT.failed);
