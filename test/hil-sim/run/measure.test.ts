/**
 * Measures of synthetic runs. Every expected figure is worked out by hand from the circle's geometry
 * (circumference 2πR, arc = R·angle) and DESIGN's definitions; the arithmetic stands beside it.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { startMeasures, takeTick } from '../../../hil-sim/run/measure.ts';
import { finishMeasures, type MeasureReport } from '../../../hil-sim/run/measure-report.ts';
import type { Water } from '../../../hil-sim/run/maps.ts';
import { findNearest, placeAt, startNearest, trackOf } from '../../../hil-sim/run/track.ts';
import type { Hearing } from '../../../hil-sim/sea/sea.ts';
import type { Trial } from '../../../hil-sim/trial/schema.ts';
import {
  flatMap,
  flowing,
  missionOf,
  onRing,
  recordOf,
  still,
  trialOf,
  type Moment,
} from '../../support/synthetic-run.ts';

/** Measures of a run whose vehicles are where `at` says, for `ticks` ticks of 1 s. */
function run(
  trial: Trial,
  ticks: number,
  at: (timeS: number) => Moment[],
  more: { water?: Water; hearings?: (tick: number) => Hearing[]; tickS?: number } = {},
): MeasureReport {
  const measures = startMeasures(trial, more.water ?? still);
  const tickS = more.tickS ?? 1;
  for (let tick = 0; tick < ticks; tick++) {
    takeTick(measures, recordOf(tick, at(tick * tickS), { tickS, hearings: more.hearings?.(tick) ?? [] }));
  }
  return finishMeasures(measures);
}

/** Five evenly spaced at a radius, going round at 1.2 m/s on 600 m: 0.0003183 turns a second. */
const evenRing =
  (radiusM: number) =>
  (timeS: number): Moment[] =>
    [0, 1, 2, 3, 4].map((index) => onRing(radiusM, (index / 5 + timeS * 0.00031831) % 1));

describe('the loop as the bench sees it', () => {
  it('has the length of the circle to one part in a million', () => {
    const track = trackOf(trialOf(1).mission.loop);
    expect(track.lengthM).toBeGreaterThan(3769.911184 * (1 - 1e-6)); // 2π·600
    expect(track.lengthM).toBeLessThanOrEqual(3769.9111844);
  });

  it.each([
    ['north of the centre', 0, 610, 10, 0],
    ['east of it, inside', 590, 0, 10, 0.25],
    ['south of it', 0, -600, 0, 0.5],
    ['west of it', -700, 0, 100, 0.75],
    ['north-east, 3-4-5 scaled: √(720² + 960²) = 1200', 720, 960, 600, 0.1024163823], // atan2(3, 4)/2π
  ])('knows distance and phase %s of a clockwise ring', (_where, eastM, northM, distanceM, phase) => {
    const nearest = startNearest();
    findNearest(trackOf(trialOf(1).mission.loop), eastM, northM, nearest);
    expect(nearest.place[0]).toBeCloseTo(distanceM, 3);
    expect(nearest.place[1]).toBeCloseTo(phase, 5); // half a chord is 1.2e-4, a far place is right to a part of it
  });

  it('counts phase the other way round on an anticlockwise ring, from north as well', () => {
    const loop = { ...trialOf(1).mission.loop, turn: 'anticlockwise' as const };
    const nearest = startNearest();
    findNearest(trackOf(loop), 600, 0, nearest);
    expect(nearest.place[1]).toBeCloseTo(0.75, 6);
    findNearest(trackOf(loop), 0, 600, nearest);
    expect(nearest.place[1]).toBeCloseTo(0, 6);
  });

  it('finds the same nearest point wherever the search starts, and it is R − r from any ring', () => {
    const track = trackOf(trialOf(1).mission.loop);
    const place = fc.record({
      radiusM: fc.double({ min: 1, max: 4000, noNaN: true }),
      phase: fc.double({ min: 0, max: 0.999999, noNaN: true }),
    });
    fc.assert(
      fc.property(place, fc.integer({ min: 0, max: 4095 }), ({ radiusM, phase }, chord) => {
        const { eastM, northM } = onRing(radiusM, phase);
        const nearest = startNearest();
        nearest.chord[0] = chord;
        findNearest(track, eastM, northM, nearest);
        expect(Math.abs(nearest.place[0]! - Math.abs(radiusM - 600))).toBeLessThan(2e-4); // R(1 − cos(π/4096)) = 0.18 mm
        expect(nearest.place[1]).toBeGreaterThanOrEqual(0);
        expect(nearest.place[1]).toBeLessThan(1);
        const off = Math.abs(nearest.place[1]! - phase);
        expect(Math.min(off, 1 - off)).toBeLessThan(1.3e-4); // half a chord: inside, a vertex may be nearest
      }),
    );
  });

  it('puts the place of a phase back at that phase', () => {
    const track = trackOf(trialOf(1).mission.loop);
    const out = new Float64Array(2);
    fc.assert(
      fc.property(fc.double({ min: 0, max: 0.9999999, noNaN: true }), (phase) => {
        placeAt(track, phase, out);
        const nearest = startNearest();
        findNearest(track, out[0]!, out[1]!, nearest);
        const off = Math.abs(nearest.place[1]! - phase);
        expect(Math.min(off, 1 - off)).toBeLessThan(1e-9);
        expect(nearest.place[0]).toBeLessThan(1e-6);
      }),
    );
  });
});

describe('cross-track and forming up', () => {
  it('of a fleet 10 m outside the ring is 10 m, formed up from the first tick', () => {
    const { values } = run(trialOf(5), 900, evenRing(610));
    expect(values.formUp_s).toBe(0);
    expect(values.crossTrackRms).toBeCloseTo(10, 3);
    expect(values.crossTrackMax).toBeCloseTo(10, 3);
    expect(values.gapRms).toBeLessThan(2e-5); // 10/610 of half a chord, over a gap of a fifth
  });

  it('is the root mean square over vehicles: one of five at 20 m inside gives 20/√5', () => {
    const { values, worst, vehicles } = run(trialOf(5), 900, (timeS) =>
      evenRing(600)(timeS).map((moment, index) =>
        index === 2 ? onRing(580, 0.4 + timeS * 0.00031831) : moment,
      ),
    );
    expect(values.crossTrackRms).toBeCloseTo(8.94427191, 3); // 20/√5
    expect(values.crossTrackMax).toBeCloseTo(20, 3);
    expect(worst.crossTrackRms.vehicle).toBe('jade');
    expect(vehicles[2]!.crossTrackRms).toBeCloseTo(20, 3);
  });

  it('counts from the start of the held span, not from its end, and forgets what was before', () => {
    // 100 m off until 299 s, then on the ring: formed up at 300 s, known at 900 s.
    const { values, worst } = run(trialOf(5), 1000, (timeS) => evenRing(timeS < 300 ? 700 : 605)(timeS));
    expect(values.formUp_s).toBe(300);
    expect(values.crossTrackMax).toBeCloseTo(5, 3);
    expect(worst.formUp_s.at_s).toBe(299);
  });

  it('forgets a span in which the fleet was formed up for less than the hold', () => {
    // 40 m off until 99 s, 100 m off until 199 s, 5 m off from then on.
    const { values } = run(trialOf(5), 900, (timeS) =>
      evenRing(timeS < 100 ? 640 : timeS < 200 ? 700 : 605)(timeS),
    );
    expect(values.formUp_s).toBe(200);
    expect(values.crossTrackMax).toBeCloseTo(5, 3);
  });

  it('starts again when one vehicle leaves for one tick before the hold is over', () => {
    const { values, worst } = run(trialOf(5), 1300, (timeS) =>
      evenRing(600)(timeS).map((moment, index) => (index === 3 && timeS === 500 ? onRing(680, 0.6) : moment)),
    );
    expect(values.formUp_s).toBe(501);
    expect(worst.formUp_s).toMatchObject({ vehicle: 'ochre', at_s: 500 });
  });

  it('keeps counting a vehicle that leaves after forming up, whatever state it claims', () => {
    const { values, worst } = run(trialOf(5), 1300, (timeS) =>
      evenRing(600)(timeS).map((moment, index) =>
        index === 3 && timeS === 1000
          ? { ...onRing(680, (0.6 + timeS * 0.00031831) % 1), state: 'surfacing' as const }
          : moment,
      ),
    );
    expect(values.formUp_s).toBe(0);
    expect(values.crossTrackMax).toBeCloseTo(80, 3);
    expect(worst.crossTrackMax).toMatchObject({ vehicle: 'ochre', at_s: 1000 });
  });

  it.each([
    ['needs the whole hold', 600, null],
    ['is formed up when it is exactly over', 601, 0],
  ])('%s', (_title, ticks, formUp) => {
    const { values } = run(trialOf(5), ticks, evenRing(605));
    expect(values.formUp_s).toBe(formUp);
    expect(values.crossTrackMax === null).toBe(formUp === null);
  });

  it('says null for all that counts from forming up if that never comes, and who was last out', () => {
    const { values, worst, vehicles } = run(trialOf(5), 900, evenRing(676));
    for (const name of [
      'formUp_s',
      'crossTrackRms',
      'crossTrackMax',
      'gapRms',
      'currentRms',
      'mapRms',
      'mapSpread',
      'positionRms',
    ] as const) {
      expect(values[name]).toBeNull();
    }
    expect(values.separationMin).not.toBeNull();
    expect(vehicles[0]!.crossTrackRms).toBeNull();
    expect(worst.crossTrackRms.at_s).toBe(899);
  });

  it('takes its bounds from the mission, and never from the limits', () => {
    const loose = missionOf({ formedUp: { crossTrack: '80 m', gap: '30 %', hold: '2 min' } });
    expect(run(trialOf(5, { mission: loose }), 200, evenRing(676)).values.formUp_s).toBe(0);
    expect(
      run(trialOf(5, { limits: { crossTrackMax: '500 m' } }), 900, evenRing(676)).values.formUp_s,
    ).toBeNull();
  });
});

describe('gaps', () => {
  /** Two vehicles on the ring: gaps 0.55 and 0.45 of it against 0.5, so both are off by a tenth. */
  const pair = (): Moment[] => [onRing(600, 0.9), onRing(600, 0.45)];

  it('are distances ahead along the loop, across phase 0 too', () => {
    const { values, worst } = run(trialOf(2), 900, pair);
    expect(values.gapRms).toBeCloseTo(0.1, 6);
    expect(worst.gapRms.vehicle).toBe('amber');
  });

  it('do not depend on where phase 0 is', () => {
    const shifted = (shift: number): number | null =>
      run(
        trialOf(3, { mission: missionOf({ formedUp: { crossTrack: '75 m', gap: '100 %', hold: '10 s' } }) }),
        12,
        () => [0.05, 0.3, 0.72].map((phase) => onRing(600, (phase + shift) % 1)),
      ).values.gapRms;
    // Gaps 0.25, 0.42, 0.33 against 1/3: errors −0.25, 0.26, −0.01; rms √(0.1302/3).
    expect(shifted(0)).toBeCloseTo(0.208326667, 5);
    fc.assert(
      fc.property(fc.double({ min: 0, max: 0.9999, noNaN: true }), (shift) => {
        expect(shifted(shift)).toBeCloseTo(0.208326667, 4);
      }),
      { numRuns: 40 },
    );
  });

  it('of a pattern have their own targets in cyclic order, whoever stands where', () => {
    const trial = trialOf(3, { mission: missionOf({ spacing: [0, 0.2, 0.5] }) });
    const formedUp = { crossTrack: '75 m', gap: '100 %', hold: '10 s' };
    const looseTrial = trialOf(3, { mission: missionOf({ spacing: [0, 0.2, 0.5], formedUp }) });
    // The pattern's gaps are 0.2, 0.3, 0.5; amber has 0.5 ahead here, cobalt 0.3, jade 0.2.
    const { values } = run(trial, 900, () => [onRing(600, 0.6), onRing(600, 0.3), onRing(600, 0.1)]);
    expect(values.formUp_s).toBe(0);
    expect(values.gapRms).toBeCloseTo(0, 6);
    // The same half a loop on: from phase 0 the gaps now come as 0.5, 0.2, 0.3.
    const on = run(trial, 900, () => [onRing(600, 0.1), onRing(600, 0.8), onRing(600, 0.6)]);
    expect(on.values.formUp_s).toBe(0);
    expect(on.values.gapRms).toBeCloseTo(0, 6);
    // In the other cyclic order, 0.3, 0.2, 0.5, no turn fits: laid on 0.2, 0.3, 0.5 it is off by 1/2, −1/3, 0.
    const other = run(looseTrial, 12, () => [onRing(600, 0), onRing(600, 0.3), onRing(600, 0.5)]);
    expect(other.values.gapRms).toBeCloseTo(0.346944333, 5); // √((1/4 + 1/9)/3)
  });

  it('of one vehicle alone are the whole loop', () => {
    const { values } = run(trialOf(1), 900, () => [onRing(600, 0.2)]);
    expect(values.formUp_s).toBe(0);
    expect(values.gapRms).toBe(0);
    expect(values.separationMin).toBeNull();
    expect(values.deliveryRatio).toBeNull();
  });

  it('leave out a vehicle that the limits except, which still counts for separation', () => {
    const trial = trialOf(3, { limits: { except: ['jade'] } });
    // Amber and cobalt stand a third apart, as in the pattern of three; jade lies 7 m from amber, and its place is open.
    const { values, excepted, vehicles } = run(trial, 900, () => [
      onRing(600, 0),
      onRing(600, 1 / 3),
      onRing(607, 0),
    ]);
    expect(excepted).toEqual(['jade']);
    expect(values.formUp_s).toBe(0);
    expect(values.gapRms).toBeCloseTo(0, 6);
    expect(values.crossTrackMax).toBeCloseTo(0, 3);
    expect(values.separationMin).toBeCloseTo(7, 9);
    expect(vehicles[2]!.gapRms).toBeNull();
  });
});

describe('separation', () => {
  it('is the least distance in space between vehicles within 5 m of depth, with pair and time', () => {
    const { values, worst } = run(trialOf(3), 100, (timeS) => [
      { eastM: 0, northM: 0, depthM: 40 },
      { eastM: 3, northM: 4, depthM: 45.1 }, // 5 m off at another depth: does not count
      { eastM: timeS === 50 ? 12 : 400, northM: 0, depthM: 40 - (timeS === 50 ? 5 : 0) },
    ]);
    expect(values.separationMin).toBeCloseTo(13, 9); // √(12² + 5²)
    expect(worst.separationMin).toEqual({ vehicle: 'amber', at_s: 50, with: 'jade' });
  });

  it.each([
    ['above', 35.1, 7],
    ['above, but farther than 5 m', 34.9, null],
    ['below', 44.9, 7],
    ['below, but farther than 5 m', 45.1, null],
  ])('counts a vehicle %s', (_where, depthM, apartM) => {
    const { values } = run(trialOf(2), 10, () => [
      { eastM: 0, northM: 0, depthM: 40 },
      { eastM: 3, northM: 4, depthM },
    ]);
    // √(25 + 4.9²) = 7.0007
    if (apartM === null) expect(values.separationMin).toBeNull();
    else expect(values.separationMin).toBeCloseTo(apartM, 2);
  });
});

describe('beliefs', () => {
  it('of current and position are compared with the truth as vectors', () => {
    const { values, worst } = run(trialOf(5), 900, (timeS) =>
      evenRing(600)(timeS).map((moment, index) => ({
        ...moment,
        current: [0.1, 0.2] as const,
        believedCurrent: index === 1 ? ([0.13, 0.24] as const) : ([0.1, 0.2] as const), // off by 0.05
        believedOff: index === 4 ? ([6, 8] as const) : ([0, 0] as const), // off by 10 m
      })),
    );
    expect(values.currentRms).toBeCloseTo(0.0223606798, 8); // 0.05/√5
    expect(values.positionRms).toBeCloseTo(4.472135955, 8); // 10/√5
    expect(worst.currentRms.vehicle).toBe('cobalt');
    expect(worst.positionRms.vehicle).toBe('umber');
  });

  it('of the map are compared with the water and with the mean of the fleet', () => {
    const trial = trialOf(2);
    const { values, worst, maps } = run(
      trial,
      900,
      (timeS) =>
        [0, 1].map((index) => ({
          ...onRing(600, index / 2),
          map: timeS % 60 === 0 ? flatMap(index === 0 ? 0.13 : 0.14, index === 0 ? 0.34 : 0.33) : null,
        })),
      { water: flowing(0.1, 0.3) },
    );
    // Amber off by (0.03, 0.04), cobalt by (0.04, 0.03): 0.05 each. Either is (0.005, 0.005) from their mean.
    expect(values.mapRms).toBeCloseTo(0.05, 9);
    expect(values.mapSpread).toBeCloseTo(0.00707106781, 9); // 0.005·√2
    expect(worst.mapRms.vehicle).toBe('amber');
    expect(maps.errorMps[3]).toBeCloseTo(0.05, 9);
  });

  it('of the map are put where the phases of the loop are', () => {
    // Water that flows east by one thousandth of the place's northing; the map says so for a clockwise ring.
    const water: Water = (_eastM, northM, _timeS, out) => {
      out[0] = northM / 1000;
      out[1] = 0;
    };
    const east = Array.from({ length: 64 }, (_, point) => 0.6 * Math.cos((2 * Math.PI * point) / 64));
    const map = { ...flatMap(0, 0), east_mps: east };
    const { values } = run(
      trialOf(1),
      900,
      (timeS) => [{ ...onRing(600, 0), map: timeS % 60 === 0 ? map : null }],
      { water },
    );
    expect(values.mapRms).toBeLessThan(1e-6);
  });
});

describe('frames and the rest', () => {
  const hearing = (sentS: number, toIndex: number, fate: Hearing['fate']): Hearing => ({
    sentS,
    heardS: fate === 'lost' ? null : sentS + 1,
    fromIndex: 0,
    toIndex,
    bytes: 32,
    fate,
  });

  it('count a frame once, a hearer once, and a repeat not at all', () => {
    const { values, vehicles } = run(
      trialOf(3),
      100,
      () => [0, 1, 2].map((index) => onRing(600, index / 3)),
      {
        hearings: (tick) => {
          if (tick === 10) return [hearing(8, 1, 'heard'), hearing(8, 2, 'lost')];
          if (tick === 14) return [hearing(8, 1, 'refused')]; // the repeat
          if (tick === 30) return [hearing(28, 1, 'heard'), hearing(28, 2, 'heard')];
          return [];
        },
      },
    );
    expect(values.framesSent).toBe(2);
    expect(values.deliveryRatio).toBe(0.75);
    expect(vehicles.map((vehicle) => vehicle.deliveryRatio)).toEqual([null, 1, 0.5]);
  });

  it('sum the energy of the fleet at the end, in watt hours', () => {
    const { values, worst } = run(trialOf(2), 10, (timeS) =>
      [1, 3].map((share) => ({ ...onRing(600, share / 5), energyJ: share * 3600 * (timeS + 1) })),
    );
    expect(values.energy_Wh).toBeCloseTo(40, 9); // (1 + 3)·10 Wh
    expect(worst.energy_Wh.vehicle).toBe('cobalt');
  });

  it('count a steer for another tick as late', () => {
    const measures = startMeasures(trialOf(1), still);
    const record = recordOf(7, [onRing(600, 0)]);
    takeTick(measures, record);
    takeTick(measures, { ...recordOf(8, [onRing(600, 0)]), steers: record.steers });
    expect(finishMeasures(measures).values.lateTicks).toBe(1);
  });

  it('keep series in bins of equal time with the root mean square of each', () => {
    const { series } = run(trialOf(1), 40, (timeS) => [onRing(timeS < 10 ? 603 : 604, 0)]);
    expect(series.binS).toBe(10);
    expect(series.binned.crossTrack[0]).toBeCloseTo(3, 3);
    expect(series.binned.crossTrack[1]).toBeCloseTo(4, 3);
    expect(series.binned.crossTrack[100]).toBeNaN();
  });
});
