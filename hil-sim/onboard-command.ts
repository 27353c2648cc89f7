/** `drywake onboard`: one agent alone, as a process of its own; this process only passes signals on. */
import { spawn } from 'node:child_process';
import { fileURLToPath } from 'node:url';

const AGENT = fileURLToPath(new URL('../onboard/main.js', import.meta.url));
const EXIT_FAILED = 3;

/** Answers the agent's exit status. */
export function runAgent(options: { vehicle: string; broker: string; bench: string }): Promise<number> {
  const child = spawn(process.execPath, [
    AGENT, '--vehicle', options.vehicle, '--bench', options.bench, '--broker', options.broker,
  ], { stdio: 'inherit' });
  for (const signal of ['SIGINT', 'SIGTERM'] as const) process.on(signal, () => { child.kill(signal); });
  return new Promise((resolve) => {
    child.once('error', () => { resolve(EXIT_FAILED); });
    child.once('exit', (code) => { resolve(code ?? EXIT_FAILED); });
  });
}
