/**
 * Accuracy against the bench's own yardsticks, over seeds: the demo with its faults, and the demo with
 * drawn water (tide phase, eddy place and turn, set and drift of the steady flow), each beside `central`
 * and beside sharing `solo`; map error at more loss beside `central`.
 *
 *   npm run build && node test/bench/drawn-water.mjs [first..last] [drawn|demo] [loss %]
 */
import { loadTrial } from '../../dist/hil-sim/trial/load.js';
import { missionsOf } from '../../dist/hil-sim/trial/missions.js';
import { seaPlan } from '../../dist/hil-sim/trial/plan.js';
import { startSea } from '../../dist/hil-sim/sea/advance.js';
import { inProcessAgents, yardstickAgents } from '../../dist/hil-sim/run/in-process.js';
import { finishMeasures } from '../../dist/hil-sim/run/measure-report.js';
import { startMeasures, takeTick } from '../../dist/hil-sim/run/measure.js';
import { runTrial } from '../../dist/hil-sim/run/run-trial.js';

const [first, last] = (process.argv[2] ?? '1..10').split('..').map(Number);
const isDrawn = process.argv[3] === 'drawn';
const loss = process.argv[4];

/** Numbers in [0, 1) for a seed: a linear congruential generator is enough here. */
function randomFrom(seed) {
  let state = (seed * 2654435761 + 12345) >>> 0;
  return () => (state = (Math.imul(state, 1664525) + 1013904223) >>> 0) / 4294967296;
}

function setsOf(seed) {
  const sets = loss === undefined ? [] : [`modem.link.loss=${loss} %`, 'faults=[]'];
  if (!isDrawn) return sets;
  const random = randomFrom(seed);
  random();
  return [
    ...sets,
    `water.currents.0.set=${(360 * random()).toFixed(1)} deg`,
    `water.currents.0.drift=${(0.02 + 0.13 * random()).toFixed(3)} m/s`,
    `water.currents.1.phase=${(360 * random()).toFixed(1)} deg`,
    `water.currents.2.centre={ east: ${(800 * random() - 400).toFixed(0)} m, north: ${(800 * random() - 400).toFixed(0)} m }`,
    `water.currents.2.turn=${random() < 0.5 ? 'clockwise' : 'anticlockwise'}`,
  ];
}

async function run(seed, agentsOf, more = []) {
  const loaded = loadTrial('configs/trials/marrow-bank.yaml', { seed, sets: [...setsOf(seed), ...more] });
  if (!loaded.ok) throw new Error(JSON.stringify(loaded.problems));
  const { trial } = loaded;
  const sea = startSea(seaPlan(trial));
  const measures = startMeasures(trial, sea.currentAt);
  const result = await runTrial({
    sea, agents: agentsOf(missionsOf(trial), sea), ticks: trial.duration / trial.tick, tickS: trial.tick,
    watchers: [{ take: (record) => takeTick(measures, record) }],
  });
  if (!result.ok) throw new Error(result.reason);
  return finishMeasures(measures).values;
}

const rows = [];
const number = (value, digits) => (value === null ? '-' : value.toFixed(digits)).padStart(8);
console.log('seed   formUp  cross m   gap %  current     map  position | map/central  xt/central | map/solo  xt/solo | central map');
for (let seed = first; seed <= last; seed++) {
  const own = await run(seed, (missions) => inProcessAgents(missions));
  const central = await run(seed, (missions, sea) => yardstickAgents(missions, sea, 'central'));
  const solo = await run(seed, (missions) => inProcessAgents(missions), ['mission.sharing=solo']);
  const row = [
    own.formUp_s, own.crossTrackRms, 100 * own.gapRms, own.currentRms, own.mapRms, own.positionRms,
    own.mapRms / central.mapRms, own.crossTrackRms / central.crossTrackRms, own.mapRms / solo.mapRms,
    own.crossTrackRms / solo.crossTrackRms, central.mapRms,
  ];
  rows.push(row);
  console.log(`${String(seed).padEnd(5)}${row.map((value, at) => number(value, [0, 2, 2, 4, 4, 2, 3, 3, 3, 3, 4][at])).join(' ')}`);
}
for (const [name, of] of [['least', Math.min], ['most', Math.max]]) {
  console.log(`${name.padEnd(5)}${rows[0].map((_value, at) => number(of(...rows.map((row) => row[at])), 4)).join(' ')}`);
}
const mean = rows[0].map((_value, at) => rows.reduce((sum, row) => sum + row[at], 0) / rows.length);
console.log(`mean ${mean.map((value) => number(value, 4)).join(' ')}`);
