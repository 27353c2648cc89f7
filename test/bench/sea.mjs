/**
 * What the sea costs: microseconds per tick of `perceive` and `advance` together for the fleet of three
 * trials, every vehicle saying a frame in each of its slots; and a pair of normals from the counter-based
 * generator beside one from `Math.random`. The least and the most of five runs are printed.
 *
 *   npm run build && node test/bench/sea.mjs
 *
 * Bars: five vehicles at most 6 µs per tick on the machine that METHODS was measured on (bare node starts
 * there in 64 ms; the start on this one is printed, to scale by).
 */
import { execFileSync } from 'node:child_process';
import { loadTrial } from '../../dist/hil-sim/trial/load.js';
import { seaPlan } from '../../dist/hil-sim/trial/plan.js';
import { normalPair, startDraw } from '../../dist/hil-sim/sea/draw.js';
import { startSea } from '../../dist/hil-sim/sea/advance.js';

const RUNS = 5;
const FRAME = 'ab'.repeat(32);
const USED = new Array(64).fill('used');

function spread(measure) {
  const each = Array.from({ length: RUNS }, measure).sort((a, b) => a - b);
  return `${each[0].toFixed(3)} to ${each[RUNS - 1].toFixed(3)}`;
}

/** Microseconds per tick over a whole trial; the steers are the same objects all along. */
function tickUs(plan, ticks) {
  const sea = startSea(plan);
  const steers = plan.vehicles.map(() => ({
    tick: 0, heading_deg: 0, speed_mps: 1.2, depth_m: 40, say: FRAME, heard: USED,
  }));
  const answers = new Array(steers.length).fill(null);
  const from = performance.now();
  for (let tick = 0; tick < ticks; tick++) {
    const senses = sea.perceive();
    for (let index = 0; index < steers.length; index++) {
      const steer = steers[index];
      steer.tick = tick;
      steer.heading_deg = (tick * 0.1 + 72 * index) % 360;
      answers[index] = senses[index] === null ? null : steer;
    }
    sea.advance(answers);
    sea.takeHearings();
  }
  return (1000 * (performance.now() - from)) / ticks;
}

function pairNs(draws) {
  const draw = startDraw(3);
  const out = new Float64Array(2);
  let sum = 0;
  const from = performance.now();
  for (let count = 0; count < draws; count++) {
    normalPair(draw, { entity: 1, purpose: 3, count }, out);
    sum += out[0];
  }
  if (!Number.isFinite(sum)) throw new Error('no normals');
  return (1e6 * (performance.now() - from)) / draws;
}

function randomPairNs(draws) {
  let sum = 0;
  const from = performance.now();
  for (let count = 0; count < draws; count++) {
    const radius = Math.sqrt(-2 * Math.log(1 - Math.random()));
    const angle = 2 * Math.PI * Math.random();
    sum += radius * Math.cos(angle) + radius * Math.sin(angle);
  }
  if (!Number.isFinite(sum)) throw new Error('no normals');
  return (1e6 * (performance.now() - from)) / draws;
}

function nodeStartMs() {
  const from = performance.now();
  execFileSync(process.execPath, ['-e', '0']);
  return performance.now() - from;
}

console.log(`bare node starts in ${spread(nodeStartMs)} ms`);
for (const name of ['quiet', 'marrow-bank', 'hard']) {
  const loaded = loadTrial(`configs/trials/${name}.yaml`, { sets: [] });
  if (!loaded.ok) throw new Error(JSON.stringify(loaded.problems));
  const plan = seaPlan(loaded.trial);
  const ticks = Math.round(loaded.trial.duration / loaded.trial.tick);
  const fleet = `${plan.vehicles.length} vehicles, ${plan.faults.length} faults`;
  console.log(`${name} (${fleet}): ${spread(() => tickUs(plan, ticks))} µs per tick`);
}
console.log(`a pair of normals: ${spread(() => pairNs(1e6))} ns, ${spread(() => randomPairNs(1e6))} from Math.random`);
