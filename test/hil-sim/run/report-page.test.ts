/** The report of a real run in headless Chromium: no script errors, nothing fetched, readable on a phone, on paper. */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { chromium, type Browser } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { inProcessAgents } from '../../../hil-sim/run/in-process.ts';
import { finishMeasures } from '../../../hil-sim/run/measure-report.ts';
import { startMeasures, takeTick } from '../../../hil-sim/run/measure.ts';
import { buildOutcome } from '../../../hil-sim/run/outcome.ts';
import { renderReport } from '../../../hil-sim/run/report.ts';
import { runTrial } from '../../../hil-sim/run/run-trial.ts';
import { startSea } from '../../../hil-sim/sea/advance.ts';
import { missionsOf } from '../../../hil-sim/trial/missions.ts';
import { seaPlan } from '../../../hil-sim/trial/plan.ts';
import { SMOKE, trialFrom } from '../../support/runs.ts';

const CHROMIUM = {
  executablePath: '/usr/bin/chromium',
  args: [
    '--no-sandbox', '--disable-gpu', '--disable-quic', '--no-first-run', '--disable-background-networking',
    '--disable-component-update', '--disable-sync',
  ],
};

const folder = mkdtempSync(join(tmpdir(), 'drywake-report-'));
const path = join(folder, 'report.html');
let browser: Browser;

beforeAll(async () => {
  const trial = trialFrom(SMOKE, {
    seed: 7,
    sets: [
      'faults=[{ at: 5 min, for: 2 min, kind: link, loss: 80 % }, { at: 8 min, kind: compass, vehicle: jade, step: 20 deg }]',
      'limits.crossTrackRms=2 m', 'orders=[{ at: 14 min, order: home }]',
    ],
  });
  const sea = startSea(seaPlan(trial));
  const measures = startMeasures(trial, sea.currentAt);
  const result = await runTrial({
    sea, agents: inProcessAgents(missionsOf(trial)), ticks: 900, tickS: 1,
    watchers: [{ take: (record) => { takeTick(measures, record); } }],
  });
  if (!result.ok) throw new Error(result.reason);
  const report = finishMeasures(measures);
  const outcome = buildOutcome({
    trial, report, repeat: 'npx drywake bench smoke.yaml', digest: result.digest, ticks: 900, wall_s: 1, version: '0', node: 'v20',
  });
  writeFileSync(path, renderReport({ trial, outcome, report }));
  browser = await chromium.launch(CHROMIUM);
}, 60_000);

afterAll(async () => {
  await browser?.close();
  rmSync(folder, { recursive: true, force: true });
});

describe('the report in a browser', () => {
  it.each([['a desk', 1200, 'light'], ['a phone', 390, 'dark']] as const)('is whole on %s, fetches nothing and complains of nothing', async (_where, width, colorScheme) => {
    const page = await browser.newPage({ viewport: { width, height: 800 }, colorScheme });
    const requests: string[] = [];
    const complaints: string[] = [];
    page.on('request', (request) => { requests.push(request.url()); });
    page.on('console', (message) => { complaints.push(message.text()); });
    page.on('pageerror', (error) => { complaints.push(String(error)); });
    await page.goto(`file://${path}`);
    expect(requests).toHaveLength(1);
    expect(complaints).toEqual([]);
    expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(width);
    const text = await page.evaluate(() => document.body.textContent ?? '');
    for (const words of ['Fail', 'crossTrackRms', 'link: loss 80 %', 'compass of jade: step 20 deg', 'order to all: home', 'not clearance to launch']) {
      expect(text).toContain(words);
    }
    expect(await page.evaluate(() => document.querySelectorAll('svg').length)).toBeGreaterThan(6);
    await page.close();
  });

  it('prints', async () => {
    const page = await browser.newPage();
    await page.goto(`file://${path}`);
    expect((await page.pdf({ format: 'A4' })).length).toBeGreaterThan(20_000);
    await page.close();
  });
});
