/**
 * How well the estimator knows the water and itself, on a ring of five vehicles in drawn water, all notes
 * shared, after the first lap: map error on the loop and position error (rms of the norm), each with its
 * NEES per degree of freedom, compass bias and log scale. Beside it stands what METHODS part E reports of a
 * study of its own on such conditions (24 seeds). Other rows: one vehicle alone, poor sensors, rare fixes,
 * late notes, faults from the second hour on, and a double gyre that swings in two hours.
 *
 *   node test/bench/estimator-study.mjs [seeds] [row,row,…]
 */
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { build } from 'vite';

const seeds = Number(process.argv[2] ?? 12);
const only = process.argv[3]?.split(',');

const folder = mkdtempSync(join(tmpdir(), 'drywake-study-'));
const entry = new URL('../support/ring-study.ts', import.meta.url).pathname;
await build({
  configFile: false, logLevel: 'error',
  build: { ssr: entry, outDir: folder, minify: false, rollupOptions: { output: { entryFileNames: 'study.mjs' } } },
  ssr: { noExternal: true },
});
const { runStudy, DEMO_SENSORS, drawnWater } = await import(pathToFileURL(join(folder, 'study.mjs')).href);
rmSync(folder, { recursive: true });

const HOUR_S = 3600;
const DEG = Math.PI / 180;
const since = (atS, value) => (atS >= 2 * HOUR_S ? value : 0);
const uniformOutliers = (share, halfM) => (_atS, random) =>
  random() < share ? [halfM * (2 * random() - 1), halfM * (2 * random() - 1)] : [0, 0];

const more = (seed) => {
  const water = drawnWater(seed);
  return (eastM, northM, atS, out) => {
    water(eastM, northM, atS, out);
    out[0] += since(atS, 0.15);
    out[1] -= since(atS, 0.13);
  };
};
const gyre = () => (eastM, northM, atS, out) => {
  const [x, y] = [(eastM + 1200) / 1200, (northM + 600) / 1200];
  const a = 0.25 * Math.sin((Math.PI * atS) / HOUR_S);
  const f = a * x * x + (1 - 2 * a) * x;
  out[0] = -0.3 * Math.sin(Math.PI * f) * Math.cos(Math.PI * y);
  out[1] = 0.3 * Math.cos(Math.PI * f) * Math.sin(Math.PI * y) * (2 * a * x + 1 - 2 * a);
};

/** What is asked of a run by each row's name. */
const ROWS = {
  'five together': () => ({}),
  'one alone': () => ({ alone: true }),
  'calibration ±2°, ±3 %': () => ({ sensors: { ...DEMO_SENSORS, compassBiasRad: 2 * DEG, logScale: 0.03 } }),
  'fixes each 30 s': () => ({ sensors: { ...DEMO_SENSORS, fixEveryS: 30 } }),
  'fixes each 10 min': () => ({ sensors: { ...DEMO_SENSORS, fixEveryS: 600 } }),
  'fixes each 30 min': () => ({ sensors: { ...DEMO_SENSORS, fixEveryS: 1800 } }),
  'fixes a minute late': () => ({ sensors: { ...DEMO_SENSORS, fixLatencyS: 60 } }),
  'notes up to 20 min late': () => ({ lateS: 1200 }),
  'one: no fix for 30 min': () => ({ upsets: [{ fix: (atS) => (atS > 2 * HOUR_S && atS < 2.5 * HOUR_S ? null : [0, 0]) }] }),
  'all: 2 % outliers': () => ({ upsets: Array(5).fill({ fix: uniformOutliers(0.02, 100) }) }),
  'all: 15 % outliers': () => ({ upsets: Array(5).fill({ fix: uniformOutliers(0.15, 100) }) }),
  'one: compass step 10°': () => ({ upsets: [{ headingRad: (atS) => since(atS, 10 * DEG) }] }),
  'one: compass drift 2°/h': () => ({ upsets: [{ headingRad: (atS) => since(atS, (2 * DEG * (atS - 2 * HOUR_S)) / HOUR_S) }] }),
  'one: log step 10 %': () => ({ upsets: [{ speedShare: (atS) => since(atS, 0.1) }] }),
  'current step 0.2 m/s': (seed) => ({ water: more(seed) }),
  'double gyre 0.3 m/s, 2 h': () => ({ water: gyre() }),
};

const REPORTED = {
  'five together': 'study: map 1.33 (1.02), position 4.4 (0.97), bias 0.07, scale 0.39',
  'one alone': 'study: map 2.65, position 7.9, bias 0.80, scale 0.86',
  'calibration ±2°, ±3 %': 'study: map 2.0, position 4.4, bias 0.10, scale 1.3',
  'double gyre 0.3 m/s, 2 h': 'study: map 2.2 with a bank of three, 4.3 without; its gyre was another',
};

console.log(`${seeds} seeds, 6 h; map cm/s (NEES), position m (NEES, most), bias °, scale %`);
for (const [name, optionsOf] of Object.entries(ROWS)) {
  if (only !== undefined && !only.some((word) => name.includes(word))) continue;
  const runs = Array.from({ length: seeds }, (_, index) => runStudy({ seed: index + 1, ...optionsOf(index + 1) }));
  const rms = (key) => Math.sqrt(runs.reduce((sum, run) => sum + run[key] ** 2, 0) / seeds);
  const mean = (key) => runs.reduce((sum, run) => sum + run[key], 0) / seeds;
  console.log(
    `${name.padEnd(25)} map ${(100 * rms('mapRmsMps')).toFixed(2)} (${mean('mapNees').toFixed(2)})`.padEnd(48)
    + ` position ${rms('positionRmsM').toFixed(1)} (${mean('positionNees').toFixed(2)}, ${Math.max(...runs.map((run) => run.positionMaxM)).toFixed(0)})`.padEnd(28)
    + ` bias ${rms('biasRmsDeg').toFixed(2)} scale ${(100 * rms('scaleRms')).toFixed(2)}   ${REPORTED[name] ?? ''}`,
  );
}
