/**
 * The whole estimator on the ring of `test/support/ring-water.ts`, five vehicles, water drawn by seed.
 * Bounds are from METHODS part E (a study of the same conditions) with room for a handful of seeds.
 */
import { describe, expect, it } from 'vitest';
import type { Note } from '../../../messages/frame.ts';
import {
  currentMeanAt, guessPosition, hearOwnNumber, isLost, reckonTick, startEstimator, startLost, takeNote, workEstimator, type Estimator,
} from '../../../onboard/core/estimator.ts';
import { noteByNumber } from '../../../onboard/core/note-log.ts';
import { missionFor } from '../../support/mission.ts';
import { runStudy, type StudyOptions } from '../../support/ring-study.ts';
import { DEMO_SENSORS, RING, drawnWater, ringVehicle, type Upset, type Water } from '../../support/ring-water.ts';

const HOUR_S = 3600;
const DEG = Math.PI / 180;

/** Position error of the fleet, rms over [fromS, toS], in metres. */
function positionRms(options: StudyOptions, fromS: number, toS: number): number {
  let sum = 0;
  let count = 0;
  runStudy({
    ...options,
    watch: (atS, _estimators, errors) => {
      if (atS < fromS || atS > toS) return;
      sum += errors.positionM ** 2;
      count += 1;
    },
  });
  return Math.sqrt(sum / count);
}

describe('in drawn water, after the first lap', () => {
  const runs = [11, 12, 13].map((seed) => runStudy({ seed, hours: 4 }));
  const rms = (of: (run: (typeof runs)[number]) => number): number =>
    Math.sqrt(runs.reduce((sum, run) => sum + of(run) ** 2, 0) / runs.length);
  const mean = (of: (run: (typeof runs)[number]) => number): number =>
    runs.reduce((sum, run) => sum + of(run), 0) / runs.length;

  it('knows the current on the loop to 1.8 cm/s and itself to 6 m', () => {
    expect(rms(({ mapRmsMps }) => mapRmsMps)).toBeLessThan(0.018);
    expect(rms(({ positionRmsM }) => positionRmsM)).toBeLessThan(6);
  });

  it('says truly how well: NEES per degree of freedom of map and position lies in 0.5 to 1.6', () => {
    for (const nees of [mean(({ mapNees }) => mapNees), mean(({ positionNees }) => positionNees)]) {
      expect(nees).toBeGreaterThan(0.5);
      expect(nees).toBeLessThan(1.6);
    }
  });

  it('learns compass bias to 0.2° of a spread of 1°, and log scale no worse than its prior', () => {
    expect(rms(({ biasRmsDeg }) => biasRmsDeg)).toBeLessThan(0.2);
    expect(rms(({ scaleRms }) => scaleRms)).toBeLessThan(0.01);
  });

  it('is worse alone than in company', () => {
    const alone = runStudy({ seed: 11, hours: 4, alone: true });
    expect(alone.mapRmsMps).toBeGreaterThan(1.3 * runs[0]!.mapRmsMps);
  });
});

describe('the same map for all', () => {
  it('is the same to the last bit on every vehicle once all notes are in, though they came late and out of order', () => {
    let all: readonly Estimator[] = [];
    runStudy({ seed: 3, hours: 2, lateS: 1200, watch: (_atS, estimators) => { all = estimators; } });
    const notes = new Map<string, Note>();
    for (const { log } of all) for (let row = 0; row < log.known.length; row++) {
      const [origin, number] = [Math.floor(row / 1024), row % 1024] as const;
      const note = log.known[row] === 1 ? noteByNumber(log, origin, number) : null;
      if (note !== null) notes.set(`${origin}/${number}`, note);
    }
    for (const estimator of all) {
      for (const note of notes.values()) takeNote(estimator, note);
      for (let tick = 0; tick < 200; tick++) workEstimator(estimator);
      expect(estimator.map.counts.isBehind).toBe(false);
    }
    for (const other of all.slice(1)) expect(other.map.active).toEqual(all[0]!.map.active);
  });
});

describe('tide', () => {
  it('is told from the steady flow over a day, and foretold for the next three hours', () => {
    const water: Water = (_eastM, _northM, atS, out) => {
      out[0] = 0.06 + 0.2 * Math.cos((2 * Math.PI * atS) / (12.4206 * HOUR_S) - 1);
      out[1] = -0.08 + 0.1 * Math.cos((2 * Math.PI * atS) / (12.4206 * HOUR_S) - 1);
    };
    let first: Estimator | null = null;
    runStudy({ seed: 5, hours: 18, fleetSize: 2, water, watch: (_atS, [estimator]) => { first = estimator ?? null; } });
    const found = new Float64Array(2);
    const truth = new Float64Array(2);
    for (let ahead = 1; ahead <= 3; ahead++) {
      const atS = (18 + ahead) * HOUR_S;
      currentMeanAt(first!, { eastM: 600, northM: 0, atS }, found);
      water(600, 0, atS, truth);
      expect(Math.abs(found[0]! - truth[0]!)).toBeLessThan(0.03);
      expect(Math.abs(found[1]! - truth[1]!)).toBeLessThan(0.03);
    }
  });
});

describe('what goes wrong', () => {
  const first = (upset: Upset): StudyOptions => ({ seed: 21, hours: 3, upsets: [upset] });
  const after = (options: StudyOptions): number => positionRms(options, 2.25 * HOUR_S, 3 * HOUR_S);

  it.each([
    ['a compass step of 10°', { headingRad: (atS: number) => (atS >= 1.5 * HOUR_S ? 10 * DEG : 0) }],
    ['a log that reads 10 % high of a sudden', { speedShare: (atS: number) => (atS >= 1.5 * HOUR_S ? 0.1 : 0) }],
    ['half an hour without fixes', { fix: (atS: number) => (atS > 1.5 * HOUR_S && atS < 2 * HOUR_S ? null : [0, 0] as const) }],
    ['a fix that is 200 m off', { fix: (atS: number) => (atS === 1.5 * HOUR_S ? [140, -140] as const : [0, 0] as const) }],
    ['two fixes in a row that are far off, each its own way', {
      fix: (atS: number) => (atS === 1.5 * HOUR_S ? [140, -140] as const : atS === 1.5 * HOUR_S + 300 ? [-100, -200] as const : [0, 0] as const),
    }],
  ] satisfies [string, Upset][])('is over within three quarters of an hour: %s', (_what, upset) => {
    expect(after(first(upset))).toBeLessThan(8);
  });

  it('is over within three quarters of an hour: a current of 0.2 m/s more, everywhere and at once', () => {
    const drawn = drawnWater(21);
    const water: Water = (eastM, northM, atS, out) => {
      drawn(eastM, northM, atS, out);
      if (atS >= 1.5 * HOUR_S) out[0]! += 0.2;
    };
    expect(after({ seed: 21, hours: 3, water })).toBeLessThan(10);
  });

  it('hardly matters while it lasts: a single fix that is 200 m off is left out', () => {
    const upset: Upset = { fix: (atS) => (atS === 1.5 * HOUR_S ? [140, -140] : [0, 0]) };
    const clean = positionRms({ seed: 21, hours: 2 }, 1.5 * HOUR_S, 2 * HOUR_S);
    expect(positionRms({ seed: 21, hours: 2, upsets: [upset] }, 1.5 * HOUR_S, 2 * HOUR_S)).toBeLessThan(clean + 1);
  });

  it('is no matter: fixes that come a minute late', () => {
    const sensors = { ...DEMO_SENSORS, fixLatencyS: 60 };
    expect(runStudy({ seed: 22, hours: 3, sensors }).positionRmsM).toBeLessThan(7.5);
  });

  it('is borne: fixes only every half hour', () => {
    const result = runStudy({ seed: 23, hours: 5, fromS: 2 * RING.lapS, sensors: { ...DEMO_SENSORS, fixEveryS: 1800 } });
    expect(result.mapRmsMps).toBeLessThan(0.1);
    expect(result.positionRmsM).toBeLessThan(60);
  });
});

describe('water that changes in an hour', () => {
  it('is followed: a double gyre of 0.3 m/s swinging in two hours (field of METHODS A20, scaled)', () => {
    const sweep = (2 * Math.PI) / (2 * HOUR_S);
    const water: Water = (eastM, northM, atS, out) => {
      const [x, y] = [(eastM + 1200) / 1200, (northM + 600) / 1200];
      const a = 0.25 * Math.sin(sweep * atS);
      const f = a * x * x + (1 - 2 * a) * x;
      out[0] = -0.3 * Math.sin(Math.PI * f) * Math.cos(Math.PI * y);
      out[1] = 0.3 * Math.cos(Math.PI * f) * Math.sin(Math.PI * y) * (2 * a * x + 1 - 2 * a);
    };
    const result = runStudy({ seed: 31, hours: 4, water });
    expect(result.mapRmsMps).toBeLessThan(0.06);
    expect(result.mapNees).toBeLessThan(2);
  });
});

describe('own notes', () => {
  const water: Water = (_eastM, _northM, _atS, out) => { out[0] = 0.2; out[1] = -0.1; };
  const PERFECT = { ...DEMO_SENSORS, fixSigmaM: 1e-3, compassBiasRad: 1e-9, compassSigmaRad: 1e-9, logScale: 1e-9, logSigmaMps: 1e-9 };

  /** Own notes of a single perfect vehicle over some hours, and its estimator. */
  function drive(hours: number, before: (estimator: Estimator) => void = () => {}): { notes: Note[]; estimator: Estimator } {
    const vehicle = ringVehicle({ seed: 1, index: 0, fleetSize: 1, water }, PERFECT);
    const base = missionFor(0, 1);
    const start = { east_m: 0, north_m: 600, depth_m: 0, heading_deg: 90 };
    const estimator = startEstimator({ ...base, self: { ...base.self, start } });
    before(estimator);
    const notes: Note[] = [];
    for (let atS = 0; atS <= hours * HOUR_S; atS++) {
      const note = reckonTick(estimator, { atS, ...vehicle.sense(atS), given: null, unrounded: false });
      if (note !== null) notes.push(note);
    }
    return { notes, estimator };
  }

  it('say the mean current, the path and its sag, numbered from 1, each chained to the one before', () => {
    const { notes } = drive(1);
    expect(notes.map(({ number }) => number)).toEqual(Array.from({ length: 12 }, (_, index) => index + 1));
    const halfArc = (1.05 * 150) / 600;
    for (const note of notes) {
      expect(note.durationS).toBe(300);
      // The dead reckoning of a ring by the tick's mean course is good to a millimetre per second.
      expect(note.currentEastMps).toBeCloseTo(0.2, 2);
      expect(note.currentNorthMps).toBeCloseTo(-0.1, 2);
      // On the frame's grid a sag of −20.5 m is the square of −5 steps.
      expect(note.sagM).toBeCloseTo(-20, 9);
      expect(Math.abs(note.sagM + 600 * (1 - Math.cos(halfArc)))).toBeLessThan(4);
      expect(note.chained).toBe(note.number > 1);
    }
  });

  it('go on beyond what peers have heard of, with a gap that is declared, after a restart without memory', () => {
    const { notes } = drive(0.25, (estimator) => {
      startLost(estimator);
      hearOwnNumber(estimator, 41);
    });
    expect(notes.map(({ number, skipped, chained }) => [number, skipped, chained])).toEqual([[49, 7, false], [50, 0, true], [51, 0, true]]);
  });

  it('start only from a fix: a guessed place makes none', () => {
    const { notes, estimator } = drive(0.2, (one) => {
      startLost(one);
      expect(isLost(one)).toBe(true);
      guessPosition(one, 0, 600);
    });
    expect(isLost(estimator)).toBe(false);
    expect(notes.length).toBe(2);
    expect(notes[0]!.endS).toBe(300);
  });
});
