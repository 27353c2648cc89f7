/**
 * Worked filters of METHODS A17: the constant state (problem and data published in a standard text,
 * estimates recomputed there), the Gauss-Markov step and the two-dimensional update.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Note } from '../../../messages/frame.ts';
import { startFilter, type Filter, type FilterPlan } from '../../../onboard/core/filter.ts';
import { predict, transition } from '../../../onboard/core/predict.ts';
import { takeIn, writeNoteRows } from '../../../onboard/core/take-note.ts';
import { absorb, compare } from '../../../onboard/core/update.ts';
import { planFor, someNotes } from '../../support/estimating.ts';

function take(plan: FilterPlan, filter: Filter, note: Note): void {
  writeNoteRows(plan, note);
  takeIn(plan, filter, note);
}

/** A filter in which states 0 and 1 are all that matters. */
function scalar(plan: FilterPlan, mean: number, variance: number): Filter {
  const filter = startFilter(plan);
  filter.covariance.fill(0);
  filter.mean[0] = mean;
  filter.covariance[0] = variance;
  return filter;
}

/** Takes in a measurement of the states 0 and 1; answers the normalised innovation squared. */
function measure(plan: FilterPlan, filter: Filter, pair: { east: number; north: number; variance: number }): number {
  plan.scratch.rowEast.fill(0)[0] = 1;
  plan.scratch.rowNorth.fill(0)[1] = 1;
  const distance2 = compare(plan, filter, pair);
  absorb(plan, filter);
  return distance2;
}

const MEASURED = [48.54, 47.11, 55.01, 55.15, 49.89, 40.85, 46.72, 50.05, 51.27, 49.95];
const ESTIMATES = [49.6860, 48.4658, 50.5693, 51.6835, 51.3326, 49.6173, 49.2098, 49.3134, 49.5282, 49.5699];
const VARIANCES = [22.5, 11.8421, 8.0357, 6.0811, 4.8913, 4.0909, 3.5156, 3.0822, 2.7439, 2.4725];

describe('compare and absorb', () => {
  it('gives the published estimates of a constant state, and the information form the same end value', () => {
    const plan = planFor();
    const filter = scalar(plan, 60, 225);
    MEASURED.forEach((value, index) => {
      measure(plan, filter, { east: value, north: 0, variance: 25 });
      expect(filter.mean[0]).toBeCloseTo(ESTIMATES[index]!, 4);
      expect(filter.covariance[0]).toBeCloseTo(VARIANCES[index]!, 4);
    });
    const information = 1 / 225 + MEASURED.length / 25;
    const vector = 60 / 225 + MEASURED.reduce((sum, value) => sum + value, 0) / 25;
    expect(filter.mean[0]).toBeCloseTo(vector / information, 9);
    expect(filter.covariance[0]).toBeCloseTo(1 / information, 9);
  });

  it('gives the worked two-dimensional update', () => {
    const plan = planFor();
    const filter = scalar(plan, 0, 0.25);
    filter.covariance[plan.size + 1] = 0.25;
    // Unequal variances: north is measured in units of 1.5 standard deviations.
    filter.covariance[plan.size + 1]! /= 1.5 ** 2;
    expect(measure(plan, filter, { east: 0.3, north: -0.2 / 1.5, variance: 0.04 })).toBeCloseTo(0.42799189, 8);
    filter.mean[1]! *= 1.5;
    filter.covariance[plan.size + 1]! *= 1.5 ** 2;
    expect([filter.mean[0], filter.mean[1]]).toEqual([expect.closeTo(0.25862069, 8), expect.closeTo(-0.14705882, 8)]);
    expect(filter.covariance[0]).toBeCloseTo(0.03448276, 8);
    expect(filter.covariance[plan.size + 1]).toBeCloseTo(0.06617647, 8);
  });

  it('keeps the covariance symmetric to the last bit, and its diagonal positive', () => {
    const plan = planFor();
    const filter = startFilter(plan);
    for (const note of someNotes(5, 30)) take(plan, filter, note);
    let largest = 0;
    for (let row = 0; row < plan.size; row++) {
      expect(filter.covariance[row * plan.size + row]).toBeGreaterThanOrEqual(0);
      for (let column = 0; column < row; column++) {
        const a = filter.covariance[row * plan.size + column]!;
        const b = filter.covariance[column * plan.size + row]!;
        largest = Math.max(largest, Math.abs(a - b));
      }
    }
    // The prediction rounds rows and columns apart: a few units in the last place of 0.02.
    expect(largest).toBeLessThan(1e-15);
  });
});

describe('transition', () => {
  it('is the Matérn-3/2 kernel: the covariance with the present fades as (1 + λt)e^(−λt)', () => {
    fc.assert(fc.property(fc.double({ min: 1, max: 1e5, noNaN: true }), (dtS) => {
      const f = transition(1e-4, dtS);
      expect(f.valueOfValue).toBeCloseTo((1 + 1e-4 * dtS) * Math.exp(-1e-4 * dtS), 12);
    }));
  });

  it('in two steps is the same as in one', () => {
    const one = transition(2e-4, 5000);
    const a = transition(2e-4, 2000);
    const b = transition(2e-4, 3000);
    expect(b.valueOfValue * a.valueOfValue + b.valueOfRate * a.rateOfValue).toBeCloseTo(one.valueOfValue, 12);
    expect(b.valueOfValue * a.valueOfRate + b.valueOfRate * a.rateOfRate).toBeCloseTo(one.valueOfRate, 7);
  });

  it('keeps a mode at its prior variance, however long nothing is heard', () => {
    const plan = planFor();
    const filter = startFilter(plan);
    const at = plan.valueAt * plan.size + plan.valueAt;
    predict(plan, filter, 0);
    for (const atS of [10, 700, 5000, 90_000]) {
      predict(plan, filter, atS);
      expect(filter.covariance[at]).toBeCloseTo(plan.modeSigmaMps ** 2, 10);
      const rate = (plan.rateAt * plan.size) + plan.rateAt;
      expect(filter.covariance[rate]! / (plan.modeSigmaMps * plan.modePerS) ** 2).toBeCloseTo(1, 8);
    }
  });
});

describe('takeIn', () => {
  it('gives a straight leg the published error √2 σ/T (METHODS A20: 5 m fixes, 30 min 0.39 cm/s, 10 min 1.18)', () => {
    for (const [durationS, cmps] of [[1800, 0.39], [600, 1.18]] as const) {
      const plan = planFor({
        uniformSigmaMps: 100, tideSigmaMps: 1e-9, modeSigmaMps: 1e-9, biasSigmaRad: 1e-9, scaleSigma: 1e-9, noteSigmaMps: 1e-6,
      });
      const filter = startFilter(plan);
      const [note] = someNotes(1, 1);
      take(plan, filter, { ...note!, durationS, endS: 3000 });
      expect(100 * Math.sqrt(filter.covariance[0]!)).toBeCloseTo(cmps, 2);
    }
  });

  it('cannot tell bias from current on one leg, but can on a circle in a uniform current (METHODS A20)', () => {
    const plan = planFor({ modeSigmaMps: 1e-9, tideSigmaMps: 1e-9, uniformSigmaMps: 1, biasSigmaRad: 0.1, fleetSize: 1 });
    const filter = startFilter(plan);
    const notes = someNotes(2, 24, 1).map((note) => ({ ...note, currentEastMps: 0.2, currentNorthMps: -0.1 }));
    const bias = plan.biasAt * plan.size + plan.biasAt;
    take(plan, filter, notes[0]!);
    expect(Math.sqrt(filter.covariance[bias]!)).toBeGreaterThan(0.09);
    for (const note of notes.slice(1)) take(plan, filter, note);
    expect(Math.sqrt(filter.covariance[bias]!)).toBeLessThan(0.005);
    expect(filter.mean[0]).toBeCloseTo(0.2, 2);
    expect(filter.mean[1]).toBeCloseTo(-0.1, 2);
  });
});
