/** Limits against measures, and what the outcome says of them. Expected figures stand in the tables. */
import { describe, expect, it } from 'vitest';
import { judgeLimits, marginShare, verdictOf } from '../../../hil-sim/run/limits.ts';
import { startMeasures, takeTick } from '../../../hil-sim/run/measure.ts';
import { finishMeasures, type MeasureReport } from '../../../hil-sim/run/measure-report.ts';
import {
  buildOutcome,
  outcomeLines,
  outcomeSchema,
  verdictSentence,
  type Outcome,
} from '../../../hil-sim/run/outcome.ts';
import { junitXml } from '../../../hil-sim/run/junit.ts';
import { LIMIT_DIMENSIONS, type Trial } from '../../../hil-sim/trial/schema.ts';
import { MEASURE_NAMES, type MeasureName } from '../../../hil-sim/run/measures.ts';
import { onRing, recordOf, still, trialOf, type Moment } from '../../support/synthetic-run.ts';

/** A report of no run whose measures are given; whatever is not given is null. */
function reportOf(values: Partial<Record<MeasureName, number | null>>, fleetSize = 2): MeasureReport {
  const blank = finishMeasures(startMeasures(trialOf(fleetSize), still));
  const nulls = Object.fromEntries(MEASURE_NAMES.map((name) => [name, null])) as Record<MeasureName, null>;
  return { ...blank, values: { ...nulls, ...values } };
}

function outcomeOf(trial: Trial, report: MeasureReport): Outcome {
  return buildOutcome({
    trial,
    report,
    digest: '0123456789abcdef'.repeat(4),
    ticks: 3600,
    wall_s: 1.5,
    version: '0.1.0',
    node: 'v20.0.0',
    repeat: 'npx drywake bench trial.yaml --seed 41',
  });
}

describe('a limit', () => {
  it.each([
    // name in the trial, its value there, measure, measured, met, margin in the measure's unit, limit in it
    ['crossTrackRms', '25 m', 'crossTrackRms', 20, true, 5, 25],
    ['crossTrackRms', '25 m', 'crossTrackRms', 25, true, 0, 25],
    ['crossTrackRms', '25 m', 'crossTrackRms', 25.5, false, -0.5, 25],
    ['separationMin', '30 m', 'separationMin', 42, true, 12, 30],
    ['separationMin', '30 m', 'separationMin', 30, true, 0, 30],
    ['separationMin', '30 m', 'separationMin', 12, false, -18, 30],
    ['formUpWithin', '60 min', 'formUp_s', 3000, true, 600, 3600],
    ['formUpWithin', '60 min', 'formUp_s', 3601, false, -1, 3600],
    ['deliveryRatioMin', '50 %', 'deliveryRatio', 0.75, true, 0.25, 0.5],
    ['deliveryRatioMin', '50 %', 'deliveryRatio', 0.25, false, -0.25, 0.5],
    ['energy', '2 kWh', 'energy_Wh', 1500, true, 500, 2000],
    ['energy', '2 kWh', 'energy_Wh', 2500, false, -500, 2000],
    ['lateTicks', 0, 'lateTicks', 0, true, 0, 0],
    ['lateTicks', 0, 'lateTicks', 1, false, -1, 0],
  ] as const)(
    '%s of %s against %s %s: met is %s, margin %s',
    (name, set, measure, value, met, margin, limit) => {
      const trial = trialOf(2, { limits: { [name]: set } });
      const [result, ...others] = judgeLimits(trial.limits, reportOf({ [measure]: value }));
      expect(others).toEqual([]);
      expect(result).toMatchObject({ name, value, met });
      expect(result!.limit).toBeCloseTo(limit, 9);
      expect(result!.margin).toBeCloseTo(margin, 9);
    },
  );

  it.each(Object.keys(LIMIT_DIMENSIONS).filter((name) => name !== 'separationMin'))(
    '%s is not met when its measure never came',
    (name) => {
      const amount = { time: '1 h', length: '10 m', share: '10 %', speed: '1 m/s', energy: '1 kWh' }[
        LIMIT_DIMENSIONS[name as keyof typeof LIMIT_DIMENSIONS]
      ];
      const [result] = judgeLimits(trialOf(2, { limits: { [name]: amount } }).limits, reportOf({}));
      expect(result).toMatchObject({ met: false, value: null, margin: null });
      expect(marginShare(result!)).toBe(-1);
    },
  );

  it('separationMin is met by vehicles that never came to one depth', () => {
    const [result] = judgeLimits(trialOf(2, { limits: { separationMin: '30 m' } }).limits, reportOf({}));
    expect(result).toMatchObject({ met: true, value: null, margin: null });
  });

  it('that is not set is not judged, and no limits pass', () => {
    expect(judgeLimits(trialOf(2).limits, reportOf({}))).toEqual([]);
    expect(verdictOf([])).toBe('pass');
  });
});

describe('the outcome', () => {
  const limits = { formUpWithin: '60 min', crossTrackRms: '25 m', gapRms: '20 %', lateTicks: 0 };
  const good = { formUp_s: 600, crossTrackRms: 6, gapRms: 0.19, lateTicks: 0 };

  it('passes its own schema, before and after JSON', () => {
    const outcome = outcomeOf(trialOf(2, { limits }), reportOf(good));
    expect(outcomeSchema.parse(JSON.parse(JSON.stringify(outcome)))).toEqual(outcome);
    expect(Object.keys(outcome.measures)).toEqual([
      'formUp_s',
      'crossTrackRms',
      'crossTrackMax',
      'gapRms',
      'separationMin',
      'currentRms',
      'mapRms',
      'mapSpread',
      'positionRms',
      'deliveryRatio',
      'framesSent',
      'energy_Wh',
      'lateTicks',
    ]);
  });

  it('says that it passed and which limit had the least room for its size', () => {
    const outcome = outcomeOf(trialOf(2, { limits }), reportOf(good));
    expect(outcome.verdict).toBe('pass');
    expect(outcome.why).toBeUndefined();
    expect(verdictSentence(outcome)).toBe(
      'Pass: all 4 limits are met. Least room: gapRms 19.0 %, at most 20.0 %.',
    );
  });

  it('says that the fleet never formed up, and names the last vehicle out', () => {
    const measures = startMeasures(trialOf(2, { limits }), still);
    for (let tick = 0; tick < 20; tick++)
      takeTick(measures, recordOf(tick, [onRing(600, 0), onRing(700, 0.5)]));
    const outcome = outcomeOf(trialOf(2, { limits }), finishMeasures(measures));
    expect(outcome.verdict).toBe('fail');
    expect(outcome.limits.map(({ met }) => met)).toEqual([false, false, false, true]);
    expect(verdictSentence(outcome)).toBe(
      'Fail: the fleet never formed up (last out: cobalt at 0:00:19), so 3 of 4 limits are not met.',
    );
    expect(outcome.measures.crossTrackRms).toBeNull();
  });

  it('names the limit that broke first, when, and how to repeat the run', () => {
    // Amber is 95 m off from 700 s on; the two pass within 20 m of each other at 650 s.
    const trial = trialOf(2, {
      limits: { crossTrackMax: '90 m', separationMin: '30 m', formUpWithin: '60 min' },
    });
    const measures = startMeasures(trial, still);
    const at = (timeS: number): Moment[] => [
      timeS === 650 ? onRing(590, 0.5) : onRing(timeS >= 700 ? 695 : 600, 0),
      onRing(timeS === 650 ? 610 : 600, 0.5),
    ];
    for (let tick = 0; tick < 800; tick++) takeTick(measures, recordOf(tick, at(tick)));
    const outcome = outcomeOf(trial, finishMeasures(measures));
    expect(outcome.limits.filter(({ met }) => !met).map(({ name }) => name)).toEqual([
      'crossTrackMax',
      'separationMin',
    ]);
    expect(outcome.why).toEqual({
      firstBreach: 'separationMin',
      at_s: 650,
      faultsThen: [],
      repeat: 'npx drywake bench trial.yaml --seed 41',
    });
    expect(verdictSentence(outcome)).toBe(
      'Fail: 2 of 3 limits are not met. First: separationMin 20.0 m, at least 30.0 m; worst amber and cobalt at 0:10:50.',
    );
  });

  it('says which vehicles the limits except', () => {
    const trial = trialOf(3, { limits: { ...limits, except: ['jade'] } });
    const measures = startMeasures(trial, still);
    takeTick(
      measures,
      recordOf(
        0,
        [0, 1, 2].map((index) => onRing(600, index / 3)),
      ),
    );
    const outcome = outcomeOf(trial, finishMeasures(measures));
    expect(outcome.except).toEqual(['jade']);
    expect(outcomeLines(outcome).join('\n')).toContain(
      "Not counted in the loop measures, by the trial's limits: jade.",
    );
  });

  it('is a table whose columns line up, the sentence first', () => {
    const lines = outcomeLines(
      outcomeOf(trialOf(2, { limits }), reportOf({ ...good, crossTrackRms: 31.25 })),
    );
    expect(lines[1]).toMatch(
      /^Fail: 1 of 4 limits is not met\. It is: crossTrackRms 31\.3 m, at most 25\.0 m/,
    );
    const table = lines.slice(
      lines.findIndex((line) => line.includes('margin')),
      -2,
    );
    expect(table).toHaveLength(5);
    expect(new Set(table.map((line) => line.search(/allowed|at (most|least)/))).size).toBe(1);
    expect(table[2]).toMatch(/^NOT MET {2}crossTrackRms +31\.3 m {2}at most 25\.0 m +−6\.25 m$/);
  });

  it('has a JUnit test case for each limit, and a failure for each that is not met', () => {
    const trial = trialOf(2, { title: 'A <loop> & "more"', limits });
    const xml = junitXml(outcomeOf(trial, reportOf({ ...good, gapRms: 0.25 })));
    expect(xml).toContain(
      '<testsuite name="A &lt;loop&gt; &amp; &quot;more&quot;" tests="4" failures="1" errors="0"',
    );
    expect(xml.match(/<testcase /g)).toHaveLength(4);
    expect(xml.match(/<failure /g)).toHaveLength(1);
    expect(xml).toContain('<failure message="gapRms is 25.0 %, but must be at most 20.0 %"/>');
  });
});
