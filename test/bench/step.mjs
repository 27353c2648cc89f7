/**
 * What one step of the agent costs: over a whole run of the demo (map solves included), the mean, the
 * 99.9th percentile, and whether the heap stays flat over 24 simulated hours.
 *
 *   npm run build && node --expose-gc test/bench/step.mjs [hours]
 *
 * Bars: mean at most 8 µs, 99.9th percentile at most 1 ms, heap flat. The time includes two readings of
 * the clock, about 0.1 µs.
 */
import { loadTrial } from '../../dist/hil-sim/trial/load.js';
import { missionsOf } from '../../dist/hil-sim/trial/missions.js';
import { seaPlan } from '../../dist/hil-sim/trial/plan.js';
import { startSea } from '../../dist/hil-sim/sea/advance.js';
import { start } from '../../dist/onboard/core/state.js';
import { step } from '../../dist/onboard/core/step.js';

const hours = Number(process.argv[2] ?? 24);
const loaded = loadTrial('configs/trials/marrow-bank.yaml', { sets: [`duration=${hours} h`, 'faults=[]', 'orders=[]'] });
if (!loaded.ok) throw new Error(JSON.stringify(loaded.problems));
const { trial } = loaded;
const sea = startSea(seaPlan(trial));
const states = missionsOf(trial).map((mission) => start(mission));
const ticks = Math.round(trial.duration / trial.tick);
const times = new Float64Array(ticks * states.length);
const heapMb = () => {
  globalThis.gc?.();
  return process.memoryUsage().heapUsed / 2 ** 20;
};
const heaps = [];
let count = 0;
for (let tick = 0; tick < ticks; tick++) {
  const senses = sea.perceive();
  const steers = senses.map((sense, index) => {
    const from = performance.now();
    const steer = step(states[index], sense);
    times[count++] = 1000 * (performance.now() - from);
    return steer;
  });
  sea.advance(steers);
  sea.takeHearings();
  if (tick % 3600 === 3599) heaps.push(heapMb());
}
const sorted = times.slice().sort();
const at = (share) => sorted[Math.min(sorted.length - 1, Math.floor(share * sorted.length))].toFixed(1);
const mean = times.reduce((sum, time) => sum + time, 0) / times.length;
console.log(`${times.length} steps, ${hours} h, ${states.length} vehicles`);
console.log(`mean ${mean.toFixed(2)} µs, median ${at(0.5)}, 99 % ${at(0.99)}, 99.9 % ${at(0.999)}, most ${at(1)} µs`);
console.log(`heap MB by the hour: ${heaps.map((heap) => heap.toFixed(1)).join(' ')}`);
