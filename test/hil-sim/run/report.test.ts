/** The report: one file that says everything in words as well, and fetches nothing. */
import { parseHTML } from 'linkedom';
import { beforeAll, describe, expect, it } from 'vitest';
import { finishMeasures } from '../../../hil-sim/run/measure-report.ts';
import { startMeasures, takeTick } from '../../../hil-sim/run/measure.ts';
import { MEASURE_NAMES } from '../../../hil-sim/run/measures.ts';
import { buildOutcome, verdictSentence, type Outcome } from '../../../hil-sim/run/outcome.ts';
import { markOf } from '../../../hil-sim/run/report-marks.ts';
import type { ReportInput } from '../../../hil-sim/run/report-input.ts';
import { renderReport } from '../../../hil-sim/run/report.ts';
import { NAMES, trialOf } from '../../support/synthetic-run.ts';
import { fleetRecord, tidalWater } from '../../support/synthetic-fleet.ts';

const LIMITS = {
  formUpWithin: '60 min',
  crossTrackRms: '6 m',
  crossTrackMax: '90 m',
  gapRms: '20 %',
  separationMin: '30 m',
  currentRms: '0.06 m/s',
  mapRms: '0.05 m/s',
  mapSpread: '0.05 m/s',
  positionRms: '10 m',
  deliveryRatioMin: '60 %',
  energy: '9 kWh',
  lateTicks: 0,
};

function inputOf(hours: number, fleetSize = 5, change: Record<string, unknown> = {}): ReportInput {
  const trial = trialOf(fleetSize, {
    title: 'Ring <b>one</b> & "two"',
    duration: `${hours} h`,
    limits: LIMITS,
    ...change,
  });
  const measures = startMeasures(trial, tidalWater);
  for (let tick = 0; tick < hours * 3600; tick++) takeTick(measures, fleetRecord(trial, tick));
  const report = finishMeasures(measures);
  const outcome: Outcome = buildOutcome({
    trial,
    report,
    digest: 'c0ffee00'.repeat(8),
    ticks: hours * 3600,
    wall_s: 2,
    version: '0.1.0',
    node: 'v20.20.2',
    repeat: 'npx drywake bench ring.yaml --seed 41',
  });
  return { trial, outcome, report };
}

/** Spaces of every kind are one. */
const plain = (text: string): string => text.replace(/\s+/g, ' ');

let input: ReportInput;
let page: string;
let text: string;
beforeAll(() => {
  input = inputOf(2);
  page = renderReport(input);
  const { document } = parseHTML(page);
  for (const style of document.querySelectorAll('style')) style.remove();
  text = plain(document.body.textContent);
});

describe('the report', () => {
  it('begins with the verdict and why', () => {
    expect(text.trimStart().startsWith(plain(verdictSentence(input.outcome)))).toBe(true);
    expect(text).toContain('Fail:');
  });

  it('names every limit with its value, what is allowed, and its margin', () => {
    const { document } = parseHTML(page);
    const rows = [...document.querySelectorAll('.limit')].map((row) => plain(row.textContent ?? ''));
    expect(rows).toHaveLength(Object.keys(LIMITS).length);
    Object.keys(LIMITS).forEach((name, index) => expect(rows[index]).toContain(name));
    const value = input.outcome.limits[1]!.value!;
    expect(rows[1]).toContain(`${value.toFixed(2)} mat most 6.00 m−${(value - 6).toFixed(2)} mnot met`);
    expect(rows.filter((row) => row.includes('not met')).length).toBe(
      input.outcome.limits.filter(({ met }) => !met).length,
    );
  });

  it('says every measure and every vehicle in words', () => {
    for (const name of MEASURE_NAMES) expect(text).toContain(name);
    for (const name of NAMES.slice(0, 5)) expect(text).toContain(name);
    expect(text).toContain('c0ffee00'.repeat(8));
    expect(text).toContain('npx drywake bench ring.yaml --seed 41');
  });

  it('draws each plot with a label of its axes, its unit, and a sentence of what it shows', () => {
    const { document } = parseHTML(page);
    const drawings = [...document.querySelectorAll('figure > svg')];
    expect(drawings.length).toBe(1 + 3 + 7);
    for (const drawing of drawings) {
      expect(drawing.getAttribute('aria-label')).toBeTruthy();
      expect(drawing.textContent).toMatch(/time, h|east of the datum, m/);
    }
    expect(text).toMatch(/0\.\d m\/s/); // the printed scale of the arrows
  });

  it('fetches nothing and runs nothing', () => {
    const outside = page
      .replaceAll('http://www.w3.org/2000/svg', '')
      .replaceAll('http://www.w3.org/1999/xlink', '');
    expect(outside.match(/https?:[^"]*/g)).toBeNull();
    expect(outside.match(/<script|<link|<img|<iframe|@import|\bsrc=|\bon[a-z]+="/gi)).toBeNull();
    expect([...page.matchAll(/url\(([^)]*)\)/g)].every(([, target]) => target!.startsWith('#'))).toBe(true);
  });

  it('takes words from the trial as words', () => {
    expect(page.includes('<b>one</b>')).toBe(false);
    expect(text).toContain('Ring <b>one</b> & "two"');
  });

  it('has numbers in every drawing, never NaN', () => {
    expect(page.match(/NaN|undefined|Infinity/g)).toBeNull();
  });

  it('is the same for the same run', () => {
    expect(renderReport(input) === page).toBe(true);
  });

  it('is at most 1.5 MB and made in at most 1.5 s, for eight vehicles and six hours', () => {
    const large = inputOf(6, 8);
    renderReport(input);
    const before = performance.now();
    const size = Buffer.byteLength(renderReport(large));
    expect(performance.now() - before).toBeLessThan(1500);
    expect(size).toBeLessThan(1.5e6);
    expect(size).toBeGreaterThan(1e5);
  });

  it('of a fleet that never formed up says so, and still shows where it went', () => {
    const lost = inputOf(0.6, 3);
    expect(lost.report.values.formUp_s).toBeNull();
    const words = plain(parseHTML(renderReport(lost)).document.body.textContent);
    expect(words).toContain('the fleet never formed up');
    expect(words).toContain('Tracks, true positions');
    expect(renderReport(lost).match(/NaN|undefined|Infinity/g)).toBeNull();
  });

  it('of one vehicle without limits or maps can be read too', () => {
    const trial = trialOf(1);
    const measures = startMeasures(trial, tidalWater);
    const record = fleetRecord(trial, 1);
    takeTick(measures, { ...record, hearings: [] });
    const report = finishMeasures(measures);
    const outcome = buildOutcome({
      trial,
      report,
      digest: '0'.repeat(64),
      ticks: 1,
      wall_s: 0,
      version: '0',
      node: 'v20',
      repeat: 'again',
    });
    const words = plain(parseHTML(renderReport({ trial, outcome, report })).document.body.textContent);
    expect(words).toContain('Pass: the trial sets no limits.');
    expect(words).toContain('No vehicle stated a map');
  });
});

describe('marks of vehicles', () => {
  it('differ in shape or filling for all sixteen, so that black and white will do', () => {
    const looks = Array.from(
      { length: 16 },
      (_, index) => `${markOf(index).path(5)} ${markOf(index).isHollow}`,
    );
    expect(new Set(looks).size).toBe(16);
  });
});
