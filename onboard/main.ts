/**
 * One agent as a process: `--vehicle NAME --bench NAME --broker URL [--qos 0|1] [--memory FILE [--resume]]
 * [--tied]`. Exit status: 0 the sea ended the run, 2 bad usage, 3 the agent failed. With a memory the
 * agent keeps its state in that file every ten minutes, and `--resume` starts it from there. A tied agent
 * belongs to the process that started it: it ends when its standard input does, however that process
 * died, and leaves an interrupt from the keyboard to it.
 */
import { parseArgs } from 'node:util';
import { name } from '../messages/fields.ts';
import { isBenchName } from '../messages/topics.ts';
import { fileMemory } from './file-memory.ts';
import { runShell, type ShellOptions } from './shell.ts';

const USAGE = '--vehicle NAME --bench NAME --broker URL [--qos 0|1] [--memory FILE [--resume]]';
const EXIT = { ended: 0, usage: 2, failed: 3 } as const;

function usage(message: string): never {
  process.stderr.write(`agent: ${message}\nusage: ${USAGE}\n`);
  process.exit(EXIT.usage);
}

interface Arguments extends Omit<ShellOptions, 'onNote' | 'memory'> {
  readonly tied: boolean;
  readonly memory: string | undefined;
  readonly resume: boolean;
}

function readArguments(): Arguments {
  let values: {
    vehicle?: string; bench?: string; broker?: string; qos?: string; memory?: string; resume?: boolean; tied?: boolean;
  };
  try {
    const text = { type: 'string' } as const;
    const flag = { type: 'boolean' } as const;
    ({ values } = parseArgs({
      options: { vehicle: text, bench: text, broker: text, qos: text, memory: text, resume: flag, tied: flag },
    }));
  } catch (error) {
    return usage(error instanceof Error ? error.message : String(error));
  }
  const { vehicle, bench, broker, qos = '0', memory, resume = false, tied = false } = values;
  if (vehicle === undefined || !name.safeParse(vehicle).success) return usage('--vehicle must be a vehicle\'s name');
  if (bench === undefined || !isBenchName(bench)) return usage('--bench must be a bench\'s name');
  if (broker === undefined || !isBrokerUrl(broker)) return usage('--broker must be a URL like mqtt://127.0.0.1:1883');
  if (qos !== '0' && qos !== '1') return usage('--qos must be 0 or 1');
  if (resume && memory === undefined) return usage('--resume needs --memory FILE');
  return { vehicle, bench, broker, qos: qos === '0' ? 0 : 1, memory, resume, tied };
}

function isBrokerUrl(text: string): boolean {
  return /^(mqtt|mqtts|tcp|ws|wss):\/\/./.test(text) && URL.canParse(text);
}

const options = readArguments();
const say = (line: string): void => { process.stderr.write(`${line}\n`); };
const stop = new AbortController();
if (options.tied) {
  const onGone = (): void => { stop.abort('the bench has gone'); };
  process.stdin.resume().once('end', onGone).once('error', onGone);
  process.on('SIGINT', () => undefined);
} else {
  process.once('SIGINT', () => { stop.abort('stopped by a signal'); });
}
process.once('SIGTERM', () => { stop.abort('stopped by a signal'); });
process.on('uncaughtException', (error) => {
  say(`agent ${options.vehicle} failed: ${error.stack ?? error.message}`);
  process.exit(EXIT.failed);
});

const onNote = (line: string): void => { say(`agent ${options.vehicle}: ${line}`); };
const memory = options.memory === undefined ? null : fileMemory(options.memory, options.resume, onNote);
const end = await runShell({ ...options, memory, onNote }, stop.signal);
if (!end.ok) say(`agent ${options.vehicle}: ${end.reason}`);
process.exit(end.ok ? EXIT.ended : EXIT.failed);
