/**
 * How fast is lockstep over MQTT, beside the bare ping-pong of the same layout (broker in this process, six
 * agent processes, one small message each way per vehicle and tick, QoS 0)? Both fleets stand ready, and
 * rounds of the two alternate, so that the machine's other work hits both alike. Needs `npm run build`.
 *
 *   node test/bench/lockstep.mjs [rounds] [ticks a round]
 */
import { spawn } from 'node:child_process';
import { processAgents } from '../../dist/hil-sim/run/processes.js';
import { runTrial } from '../../dist/hil-sim/run/run-trial.js';
import { startSea } from '../../dist/hil-sim/sea/advance.js';
import { startBroker } from '../../dist/hil-sim/shell/broker.js';
import { loadTrial } from '../../dist/hil-sim/trial/load.js';
import { missionsOf } from '../../dist/hil-sim/trial/missions.js';
import { seaPlan } from '../../dist/hil-sim/trial/plan.js';

const rounds = Number(process.argv[2] ?? 8);
const ticks = Number(process.argv[3] ?? 1000);
const names = ['amber', 'cobalt', 'jade', 'ochre', 'umber', 'indigo'];
const path = new URL('../../configs/trials/smoke.yaml', import.meta.url).pathname;
const vehicles = names.map((name, index) => {
  const angle = (2 * Math.PI * index) / names.length;
  return `{ name: ${name}, start: { east: ${(300 * Math.sin(angle)).toFixed(1)} m, north: `
    + `${(300 * Math.cos(angle)).toFixed(1)} m, depth: 20 m, heading: ${(60 * index + 90) % 360} deg } }`;
});
const loaded = loadTrial(path, { seed: 7, sets: [`fleet.vehicles=[${vehicles.join(', ')}]`] });
if (!loaded.ok) throw new Error(JSON.stringify(loaded.problems));

const bus = await startBroker();
const barePing = await startBare();
const agents = await processAgents({ bus, bench: 'bench', missions: missionsOf(loaded.trial) });
const sea = startSea(seaPlan(loaded.trial));

const rates = { bare: [], lockstep: [] };
for (let round = 0; round <= rounds; round++) {
  const bare = await rate(() => barePing(ticks));
  const lockstep = await rate(async () => {
    const result = await runTrial({ sea, agents, ticks: sea.tick + ticks, tickS: 1, watchers: [] });
    if (!result.ok) throw new Error(result.reason);
  });
  if (round === 0) continue; // the first round warms up
  rates.bare.push(bare);
  rates.lockstep.push(lockstep);
  console.log(`round ${round}: bare ${bare.toFixed(0)}, lockstep ${lockstep.toFixed(0)} ticks/s, ratio ${(lockstep / bare).toFixed(2)}`);
}
const median = (values) => [...values].sort((a, b) => a - b)[Math.floor(values.length / 2)];
const ratios = rates.lockstep.map((value, index) => value / rates.bare[index]);
console.log(`median of ${rounds} rounds of ${ticks} ticks, six agents: bare ${median(rates.bare).toFixed(0)}, `
  + `lockstep ${median(rates.lockstep).toFixed(0)} ticks/s, ratio ${median(ratios).toFixed(2)} `
  + `(${Math.min(...ratios).toFixed(2)} to ${Math.max(...ratios).toFixed(2)})`);
await agents.close();
await bus.close();

async function rate(run) {
  const startedMs = performance.now();
  await run();
  return (1000 * ticks) / (performance.now() - startedMs);
}

/** Starts six echoing agents; answers the function that plays so many ticks with them. */
async function startBare() {
  const sense = Buffer.from(JSON.stringify({ tick: 0, at_s: 0.5, heading_deg: 123.456, speed_mps: 1.234, depth_m: 40.5 }));
  let missing = names.length;
  let done = () => undefined;
  const hear = () => {
    missing -= 1;
    if (missing === 0) done();
  };
  const allHeard = () => new Promise((resolve) => { done = resolve; });
  await bus.subscribe('drywake/bare/+/status', hear);
  await bus.subscribe('drywake/bare/+/steer', hear);
  const ready = allHeard();
  for (const name of names) {
    spawn(process.execPath, [new URL('echo-agent.mjs', import.meta.url).pathname, bus.url, name], { stdio: 'inherit' });
  }
  await ready;
  return async (count) => {
    for (let tick = 0; tick < count; tick++) {
      missing = names.length;
      const heard = allHeard();
      for (const name of names) bus.publish(`drywake/bare/${name}/sense`, sense);
      await heard;
    }
  };
}
