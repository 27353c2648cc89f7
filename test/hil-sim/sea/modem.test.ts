/**
 * Frames on the water: slots by the sender's clock, travel and air time by METHODS A8 with the sound speed
 * of A1, half duplex, overlap, and draws that nobody else's frames shift. Hand arithmetic beside each.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { startSea } from '../../../hil-sim/sea/advance.ts';
import type { LinkPlan, SeaPlan, VehiclePlan } from '../../../hil-sim/sea/plan.ts';
import type { Hearing } from '../../../hil-sim/sea/sea.ts';
import { HEARD_MAX } from '../../../messages/sense.ts';
import { seaPlan, steerTo, vehiclePlan } from '../../support/sea-plan.ts';
import { FRAME, runSea, sensesOf } from '../../support/sea-runs.ts';

const still = { heading_deg: 0, speed_mps: 0 };

interface Modem { link?: Partial<LinkPlan>; slotS?: number; bitRateBps?: number }

function fleetPlan(vehicles: readonly Partial<VehiclePlan>[], modem: Modem = {}, more: Partial<SeaPlan> = {}): SeaPlan {
  const plan = seaPlan({ vehicles: vehicles.map((change, index) => vehiclePlan({ name: `v${index}`, fixEveryS: 1e6, ...change })), ...more });
  const { link, ...timing } = modem;
  return { ...plan, modem: { ...plan.modem, ...timing, link: { ...plan.modem.link, ...link } } };
}

const apart = (count: number, stepM: number): Partial<VehiclePlan>[] =>
  Array.from({ length: count }, (_none, index) => ({ startEastM: index * stepM }));

const talk = (): { heading_deg: number; speed_mps: number; say: string } => ({ ...still, say: FRAME });
const sents = (hearings: readonly Hearing[], from: number): number[] =>
  [...new Set(hearings.filter(({ fromIndex }) => fromIndex === from).map(({ sentS }) => sentS))];

describe('slots', () => {
  it('are those of the onboard clock: its offset and drift carry them off true time', () => {
    const plan = fleetPlan([{}, { clockOffsetS: 2.5, clockDriftRatio: 1e-4 }, {}, {}, {}]);
    const hearings = runSea(startSea(plan), 70, talk);
    // Slot 1 of round n begins at onboard 20 n + 4, at true (20 n + 4 − 2.5)/1.0001.
    const expected = [1.49985, 21.49785, 41.49585, 61.493851];
    const got = sents(hearings, 1);
    expect(got).toHaveLength(4);
    got.forEach((sentS, at) => expect(sentS).toBeCloseTo(expected[at]!, 6));
    expect(sents(hearings, 0)).toEqual([0, 20, 40, 60]);
    expect(sents(hearings, 4)).toEqual([16, 36, 56]);
  });

  it('take the frame of the steer whose tick they begin in, and a newer frame takes the place of a waiting one', () => {
    const sea = startSea(fleetPlan(apart(2, 100)));
    const heard: string[] = [];
    runSea(sea, 30, ({ tick, heard: frames }, index) => {
      if (index === 0) heard.push(...frames.map(({ bytes }) => bytes.slice(0, 4)));
      return { ...still, say: index === 1 ? tick.toString(16).padStart(4, '0').repeat(16) : null };
    });
    // Two slots of 4 s: vehicle 1's begin at 4, 12, 20, 28.
    expect(heard).toEqual(['0004', '000c', '0014', '001c']);
    expect(sea.framesSent).toBe(4);
  });

  it('say a frame once', () => {
    const hearings = runSea(startSea(fleetPlan(apart(2, 100))), 60, ({ tick }) => ({ ...still, say: tick === 5 ? FRAME : null }));
    expect(hearings.map(({ fromIndex, sentS }) => [fromIndex, sentS])).toEqual([[0, 8], [1, 12]]);
  });
});

describe('travel', () => {
  it('takes turn-on, air time and range over sound speed: 2 km, 256 bits at 400 bit/s (A8) at 1491.435 m/s (A1)', () => {
    const plan = fleetPlan([{}, { startEastM: 1200, startNorthM: 1600 }], { bitRateBps: 400 }, {
      water: { temperatureDegC: 10, salinityPsu: 35, depthM: 200 },
    });
    const hearings = runSea(startSea(plan), 12, ({ tick }, index) => ({ ...still, say: index === 0 && tick === 0 ? FRAME : null }));
    // 0.2 s + 0.64 s + 2000/1491.435068 s
    expect(hearings[0]!.heardS).toBeCloseTo(2.180990, 6);
  });

  it('counts the difference in depth, and is told on the hearer\'s clock in the first tick at or after it', () => {
    const plan = fleetPlan([{ startDepthM: 0 }, { startDepthM: 40, startEastM: 30, clockOffsetS: 100 }], {}, {
      water: { temperatureDegC: 0, salinityPsu: 35, depthM: 0 },
    });
    const seen: [number, number][] = [];
    const sea = startSea(plan);
    for (let tick = 0; tick < 12; tick++) {
      const senses = sea.perceive();
      for (const { at_s } of senses[1]!.heard) seen.push([tick, at_s]);
      sea.advance(senses.map((sense, index) => (steerTo(tick, { ...still, heard: sense!.heard.length, say: index === 0 && tick === 0 ? FRAME : null }))));
    }
    // 0.6 s + 50 m / 1448.96 m/s = 0.6345075 s on a clock that is 100 s ahead, told to the microsecond.
    expect(seen).toHaveLength(1);
    expect(seen[0]![0]).toBe(1);
    expect(seen[0]![1]).toBe(100.634508);
  });
});

describe('half duplex and overlap', () => {
  // Vehicle 1's clock is 3.7 s ahead: its slot of onboard 4 begins at true 0.3, inside 0's frame of 0 s to 0.6 s, and
  // its own frame, which begins 0.2 s later and 10 ms away, reaches 0 before that has ended.
  const talkingOver = [{}, { startEastM: 15, clockOffsetS: 3.7 }, { startEastM: 5000 }];

  it.each([0, 60])('a frame that overlaps the hearer\'s own sending is deaf, whatever delay (%d s) holds it', (delayS) => {
    const hearings = runSea(startSea(fleetPlan(talkingOver, { link: { delayS } })), 200, ({ tick }, index) =>
      ({ ...still, say: tick < 100 && index < 2 ? FRAME : null }));
    const between = hearings.filter(({ toIndex }) => toIndex < 2);
    expect(between.length).toBeGreaterThan(10);
    for (const { fate, heardS } of between) expect([fate, heardS]).toEqual(['deaf', null]);
    const third = hearings.filter(({ toIndex }) => toIndex === 2);
    expect(third.every(({ fate }) => fate === 'collided')).toBe(true);
  });

  it('two frames that meet at a hearer are lost there both, though each is heard elsewhere', () => {
    // 0 and 1 send together, 3 km apart. 2 stands in the middle: both arrive at once. 3 and 4 stand 300 m
    // outside either: the far frame comes 2 s after the near one, which has gone by then.
    const plan = fleetPlan([
      { startEastM: 0 }, { startEastM: 3000, clockOffsetS: 4 }, { startEastM: 1500 }, { startEastM: -300 }, { startEastM: 3300 },
    ]);
    const hearings = runSea(startSea(plan), 100, (_sense, index) => ({ ...still, say: index < 2 ? FRAME : null }));
    const at = (hearer: number): Set<string> => new Set(hearings.filter(({ toIndex }) => toIndex === hearer).map(({ fate }) => fate));
    expect(at(2)).toEqual(new Set(['collided']));
    expect(at(3)).toEqual(new Set(['heard']));
    expect(at(4)).toEqual(new Set(['heard']));
  });

  it('a frame that the link loses is on the water all the same', () => {
    const plan = fleetPlan([{ startEastM: 0 }, { startEastM: 3000, clockOffsetS: 4 }, { startEastM: 1500 }], {}, {
      faults: [{ kind: 'link', atS: 0, untilS: 1e9, from: [0], to: [2], change: { loss: 1 } }],
    });
    const hearings = runSea(startSea(plan), 60, (_sense, index) => ({ ...still, say: index < 2 ? FRAME : null }));
    const fates = hearings.filter(({ toIndex }) => toIndex === 2).map(({ fromIndex, fate }) => `${fromIndex} ${fate}`);
    expect(new Set(fates)).toEqual(new Set(['0 dropped-by-fault', '1 collided']));
  });
});

describe('delay, repeats and garbling', () => {
  it('hear a repeated frame a second time, later, with the same bytes', () => {
    const hearings = runSea(startSea(fleetPlan(apart(2, 100), { link: { repeat: 1 } })), 60, ({ tick }, index) =>
      ({ ...still, say: tick === 0 && index === 0 ? FRAME : null }));
    expect(hearings.map(({ sentS, fate }) => [sentS, fate])).toEqual([[0, 'heard'], [0, 'heard']]);
    expect(hearings[1]!.heardS! - hearings[0]!.heardS!).toBeGreaterThanOrEqual(0.5);
    expect(hearings[1]!.heardS! - hearings[0]!.heardS!).toBeLessThanOrEqual(3.5);
  });

  it('hand a garbled frame to the agent, changed, and call it garbled whatever the agent says', () => {
    const got: string[] = [];
    const hearings = runSea(startSea(fleetPlan(apart(2, 100), { link: { garble: 1 } })), 60, ({ heard }) => {
      got.push(...heard.map(({ bytes }) => bytes));
      return talk();
    });
    expect(got.length).toBeGreaterThan(10);
    for (const bytes of got) {
      expect(bytes).toHaveLength(64);
      expect(bytes).not.toBe(FRAME);
    }
    expect(new Set(hearings.map(({ fate }) => fate))).toEqual(new Set(['garbled']));
  });

  it('call a frame refused if the agent does not use it', () => {
    const sea = startSea(fleetPlan(apart(2, 100)));
    const fates: string[] = [];
    for (let tick = 0; tick < 30; tick++) {
      sea.advance(sea.perceive().map((sense, index) => ({
        ...steerTo(tick, { ...still, say: index === 0 ? FRAME : null }), heard: sense!.heard.map(() => 'check' as const),
      })));
      fates.push(...sea.takeHearings().map(({ fate }) => fate));
    }
    expect(new Set(fates)).toEqual(new Set(['refused']));
  });

  it('never hand over more frames in a tick than a sense holds, and lose none: the rest comes a tick later', () => {
    // A link whose delay falls from 300 s by 150 s to none: what was held and what is new comes together.
    const plan = fleetPlan(apart(16, 5), { slotS: 0.7, link: { repeat: 1, delayS: 300 } }, { tickS: 10 });
    const sea = startSea({ ...plan, faults: [
      { kind: 'link', atS: 300, untilS: 1e9, from: [...plan.vehicles.keys()], to: [...plan.vehicles.keys()], change: { delayS: 0 } },
      { kind: 'link', atS: 150, untilS: 300, from: [...plan.vehicles.keys()], to: [...plan.vehicles.keys()], change: { delayS: 150 } },
    ] });
    let most = 0;
    const hearings = runSea(sea, 90, ({ tick, heard }) => {
      most = Math.max(most, heard.length);
      return { ...still, say: tick < 45 ? FRAME : null };
    });
    expect(most).toBe(HEARD_MAX);
    expect(hearings).toHaveLength(2 * 15 * sea.framesSent);
    expect(hearings.every(({ fate }) => fate === 'heard')).toBe(true);
  });
});

describe('any run', () => {
  const links = fc.record({
    loss: fc.constantFrom(0, 0.3), burst: fc.constantFrom(1, 5), delayS: fc.constantFrom(0, 30), jitterS: fc.constantFrom(0, 5),
    repeat: fc.constantFrom(0, 0.4), garble: fc.constantFrom(0, 0.2),
  });
  const fleet = fc.array(fc.record({
    startEastM: fc.integer({ min: -3000, max: 3000 }), startNorthM: fc.integer({ min: -3000, max: 3000 }),
    startDepthM: fc.constantFrom(0, 40), clockOffsetS: fc.constantFrom(0, 0, -1.3, 7),
  }), { minLength: 2, maxLength: 6 });

  it('hears nothing before its last bit can be there, and nothing of itself; every frame ends once per hearer, a repeat twice', () => {
    fc.assert(fc.property(links, fleet, fc.nat(1_000_000), (link, vehicles, seed) => {
      const sea = startSea(fleetPlan(vehicles, { link }, { seed }));
      const hearings = runSea(sea, 500, ({ tick, heard }, index) => {
        for (const { at_s } of heard) {
          // In the first tick at or after its arrival, to the microsecond that the modem tells.
          const arrivedS = at_s - vehicles[index]!.clockOffsetS;
          expect(arrivedS).toBeLessThanOrEqual(tick + 1e-6);
          expect(arrivedS).toBeGreaterThan(tick - 1 - 1e-6);
        }
        return { ...still, say: tick < 380 ? FRAME : null };
      });
      const ends = new Map<string, number>();
      for (const { sentS, heardS, fromIndex, toIndex, fate } of hearings) {
        const key = `${sentS} ${fromIndex} ${toIndex}`;
        ends.set(key, (ends.get(key) ?? 0) + 1);
        expect(fromIndex).not.toBe(toIndex);
        expect(heardS === null).toBe(fate !== 'heard' && fate !== 'garbled');
        const [from, to] = [vehicles[fromIndex]!, vehicles[toIndex]!];
        const range = Math.sqrt((from.startEastM - to.startEastM) ** 2 + (from.startNorthM - to.startNorthM) ** 2);
        // No sea water lets sound go faster than 1600 m/s (A1: 1450 to 1560 m/s in the upper kilometre).
        if (heardS !== null) expect(heardS - sentS).toBeGreaterThanOrEqual(0.6 + range / 1600);
      }
      expect(ends.size).toBe((vehicles.length - 1) * sea.framesSent);
      expect(Math.max(...ends.values())).toBeLessThanOrEqual(link.repeat > 0 ? 2 : 1);
    }), { numRuns: 20 });
  });

  it('is the same from the same plan and steers, and another from another seed', () => {
    const plan = fleetPlan(apart(4, 400).map((change) => ({ ...change, compassSigmaRad: 0.01, fixEveryS: 60 })), {
      link: { loss: 0.2, burst: 3, jitterS: 1, repeat: 0.1, garble: 0.1 },
    });
    const once = sensesOf(startSea(plan), 300, talk);
    expect(sensesOf(startSea(plan), 300, talk)).toEqual(once);
    expect(sensesOf(startSea({ ...plan, seed: 2 }), 300, talk)).not.toEqual(once);
  });

  it('draws alike for a pair whatever vehicles are added at the end: its n-th frame has the same fate', () => {
    const fatesOf = (count: number): string[] => {
      const plan = fleetPlan(apart(count, 50), { link: { loss: 0.3, burst: 3, garble: 0.2 } });
      return runSea(startSea(plan), 200 * count, talk)
        .filter(({ fromIndex, toIndex }) => fromIndex === 0 && toIndex === 1).slice(0, 45).map(({ fate }) => fate);
    };
    expect(fatesOf(3)).toHaveLength(45);
    expect(new Set(fatesOf(3)).size).toBeGreaterThanOrEqual(3);
    expect(fatesOf(7)).toEqual(fatesOf(3));
  });
});
