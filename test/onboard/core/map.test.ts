import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Note } from '../../../messages/frame.ts';
import { chosen } from '../../../onboard/core/bank.ts';
import { currentWithSpread, planNow, startMap, takeIntoMap, workMap, type CurrentMap } from '../../../onboard/core/map.ts';
import { noteCount, startNoteLog } from '../../../onboard/core/note-log.ts';
import { normalsFrom, planFor, someNotes } from '../../support/estimating.ts';
import { oracleCurrent } from '../../support/oracle-map.ts';

const answer = () => ({ eastMps: 0, northMps: 0, varEastM2ps2: 0, covEastNorthM2ps2: 0, varNorthM2ps2: 0 });

function mapOf(notes: readonly Note[], change = {}): CurrentMap {
  const plan = planFor(change);
  const map = startMap(plan, startNoteLog(plan.fleetSize));
  for (const note of notes) takeIntoMap(map, note);
  settle(map);
  return map;
}

function settle(map: CurrentMap): void {
  for (let tick = 0; tick < 1000 && map.counts.isBehind; tick++) workMap(map);
  expect(map.counts.isBehind).toBe(false);
}

describe('the current map', () => {
  it('agrees with one dense Gaussian over the same notes', () => {
    const notes = someNotes(3, 30);
    const map = mapOf(notes);
    for (const [eastM, northM, laterS] of [[600, 0, 0], [-300, 450, 600], [100, -700, 5000]] as const) {
      const atS = notes.at(-1)!.endS + laterS;
      const found = answer();
      currentWithSpread(map, { eastM, northM, atS }, found);
      const oracle = oracleCurrent(planNow(map), notes, { eastM, northM, atS });
      expect(found.eastMps).toBeCloseTo(oracle.east, 8);
      expect(found.northMps).toBeCloseTo(oracle.north, 8);
      expect(found.varEastM2ps2 / oracle.varEast).toBeCloseTo(1, 6);
      expect(found.varNorthM2ps2 / oracle.varNorth).toBeCloseTo(1, 6);
    }
  });

  it('agrees with it too where notes of a chain are missing', () => {
    const notes = someNotes(4, 30).filter((_note, index) => index % 7 !== 3);
    const map = mapOf(notes);
    const at = { eastM: 0, northM: 600, atS: notes.at(-1)!.endS };
    const found = answer();
    currentWithSpread(map, at, found);
    expect(found.eastMps).toBeCloseTo(oracleCurrent(planNow(map), notes, at).east, 8);
  });

  it('is the same to the last bit for the same notes, in any order and however often repeated', () => {
    const notes = someNotes(7, 60);
    const inOrder = mapOf(notes);
    const shuffles = fc.shuffledSubarray(notes, { minLength: notes.length, maxLength: notes.length });
    fc.assert(fc.property(shuffles, fc.shuffledSubarray(notes), fc.integer({ min: 0, max: 3 }), (order, again, work) => {
      const plan = planFor();
      const map = startMap(plan, startNoteLog(plan.fleetSize));
      for (const note of [...order, ...again]) {
        takeIntoMap(map, note);
        for (let tick = 0; tick < work; tick++) workMap(map);
      }
      settle(map);
      expect(noteCount(map.log)).toBe(notes.length);
      expect(map.active).toEqual(inOrder.active);
    }), { numRuns: 40 });
  });

  it('does a bounded share of work a tick, and answers meanwhile', () => {
    const notes = someNotes(8, 200);
    const map = mapOf(notes.slice(1));
    takeIntoMap(map, notes[0]!);
    const before = answer();
    currentWithSpread(map, { eastM: 0, northM: 600, atS: 30_000 }, before);
    let ticks = 0;
    while (map.counts.isBehind) {
      const cursor = map.working.members[0]!.clock.cursor;
      workMap(map);
      if (map.counts.isBehind) expect(map.working.members[0]!.clock.cursor - cursor).toBeLessThanOrEqual(40);
      ticks += 1;
    }
    expect(ticks).toBeGreaterThan(3);
    expect(Number.isFinite(before.eastMps)).toBe(true);
  });

  it('is free of divergence everywhere', () => {
    const map = mapOf(someNotes(9, 40));
    const inside = fc.double({ min: -1100, max: 1100, noNaN: true });
    fc.assert(fc.property(inside, inside, (eastM, northM) => {
      const at = (east: number, north: number) => {
        const found = answer();
        currentWithSpread(map, { eastM: east, northM: north, atS: 9000 }, found);
        return found;
      };
      const h = 0.5;
      const divergence = (at(eastM + h, northM).eastMps - at(eastM - h, northM).eastMps
        + at(eastM, northM + h).northMps - at(eastM, northM - h).northMps) / (2 * h);
      expect(Math.abs(divergence)).toBeLessThan(1e-8);
    }), { numRuns: 50 });
  });
});

describe('honesty', () => {
  const UNIFORM_ONLY = { modeSigmaMps: 1e-9, tideSigmaMps: 1e-9, noteSigmaMps: 0.005 };

  /**
   * Mean normalised squared error of the uniform current over independent runs drawn from the prior.
   * Counting each note `counted` times is the same as believing its errors that much smaller.
   */
  function meanNees(runs: number, counted: number): number {
    let sum = 0;
    for (let run = 0; run < runs; run++) {
      const normal = normalsFrom(1000 + run);
      const plan = planFor(UNIFORM_ONLY);
      const truth = [plan.uniformSigmaMps * normal(), plan.uniformSigmaMps * normal()] as const;
      const biases = Array.from({ length: 3 }, () => [plan.biasSigmaRad * normal(), plan.scaleSigma * normal()] as const);
      const fixes = new Map<string, number>();
      const fix = (name: string): number => {
        if (!fixes.has(name)) fixes.set(name, 5 * normal());
        return fixes.get(name)!;
      };
      const notes = someNotes(run, 18).map((note) => {
        const [bias, scale] = biases[note.originIndex]!;
        const water = [(note.endEastM - note.startEastM) / 300 - truth[0], (note.endNorthM - note.startNorthM) / 300 - truth[1]] as const;
        const at = (axis: number): number => (fix(`${note.originIndex}/${note.number}/${axis}`) - fix(`${note.originIndex}/${note.number - 1}/${axis}`)) / 300;
        return {
          ...note,
          currentEastMps: truth[0] + at(0) - scale * water[0] - bias * water[1] + plan.noteSigmaMps * normal(),
          currentNorthMps: truth[1] + at(1) - scale * water[1] + bias * water[0] + plan.noteSigmaMps * normal(),
        };
      });
      const believed = notes.map((note) => ({ ...note, fixSigmaM: 5 / Math.sqrt(counted) }));
      const map = mapOf(believed, { ...UNIFORM_ONLY, noteSigmaMps: plan.noteSigmaMps / Math.sqrt(counted) });
      const { mean, covariance } = chosen(map.active);
      const size = map.plan.size;
      const error = [mean[0]! - truth[0], mean[1]! - truth[1]] as const;
      const [a, b, c] = [covariance[0]!, covariance[1]!, covariance[size + 1]!];
      sum += (c * error[0] ** 2 - 2 * b * error[0] * error[1] + a * error[1] ** 2) / (a * c - b * b);
    }
    return sum / runs;
  }

  it('has a mean NEES within its two-sided 95 % band for two dimensions and 100 runs (METHODS A16)', () => {
    const nees = meanNees(100, 1);
    expect(nees).toBeGreaterThan(1.6273);
    expect(nees).toBeLessThan(2.4106);
  });

  it('would be caught if notes were counted twice', () => {
    expect(meanNees(100, 2)).toBeGreaterThan(2.4106);
  });
});
