/** The sea as a whole: motion by METHODS A20, slots and air time by A8, energy by hand, hearings that add up. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { startSea } from '../../../hil-sim/sea/advance.ts';
import type { SeaPlan } from '../../../hil-sim/sea/plan.ts';
import type { Hearing, Sea } from '../../../hil-sim/sea/sea.ts';
import type { Sense } from '../../../messages/sense.ts';
import { seaPlan, steerTo, vehiclePlan } from '../../support/sea-plan.ts';

const FRAME = 'ab'.repeat(32);

function run(sea: Sea, ticks: number, order: (sense: Sense, index: number) => { heading_deg: number; speed_mps: number; say?: string | null }): Hearing[] {
  const hearings: Hearing[] = [];
  for (let tick = 0; tick < ticks; tick++) {
    const senses = sea.perceive();
    sea.advance(senses.map((sense, index) => (sense === null
      ? null
      : steerTo(sense.tick, { ...order(sense, index), heard: sense.heard.length }))));
    hearings.push(...sea.takeHearings());
  }
  return hearings;
}

const north = { heading_deg: 0, speed_mps: 1.5 };

describe('bodies', () => {
  it.each([
    [340.5288, 1.414214, 0], [31.367, 1.811291, 45], [90, 2, 90], [148.633, 1.811291, 135], [199.4712, 1.414214, 180], [270, 1, 270],
  ])('on heading %d in a current of 0.5 m/s setting 090 make good %d m/s on course %d (METHODS A20)', (heading, ground, course) => {
    const sea = startSea(seaPlan({ currents: [{ kind: 'uniform', setRad: Math.PI / 2, driftMps: 0.5 }] }));
    run(sea, 100, () => ({ heading_deg: heading, speed_mps: 1.5 }));
    const [east0, north0] = [sea.truth.eastM[0]!, sea.truth.northM[0]!];
    run(sea, 100, () => ({ heading_deg: heading, speed_mps: 1.5 }));
    const [east, made] = [sea.truth.eastM[0]! - east0, sea.truth.northM[0]! - north0];
    expect(Math.sqrt(east * east + made * made) / 100).toBeCloseTo(ground, 4);
    const bearing = ((Math.atan2(east, made) * 180) / Math.PI + 360) % 360;
    expect(Math.abs(((bearing - course + 540) % 360) - 180)).toBeLessThan(0.002);
  });

  it('turn no faster than they can, and settle on the ordered heading by compass', () => {
    const sea = startSea(seaPlan({ vehicles: [vehiclePlan({ turnRateRadps: (5 * Math.PI) / 180, compassBiasRad: 0.1 })] }));
    run(sea, 10, () => ({ heading_deg: 180, speed_mps: 1 }));
    expect(sea.truth.headingRad[0]! * (180 / Math.PI)).toBeCloseTo(50, 6);
    run(sea, 40, () => ({ heading_deg: 180, speed_mps: 1 }));
    expect(sea.perceive()[0]!.heading_deg).toBeCloseTo(180, 6);
    expect(sea.truth.headingRad[0]!).toBeCloseTo(Math.PI - 0.1, 9);
  });

  it('use P = hotel + cruise·(v/cruise)³, by hand: an hour at cruise is 90 Wh, at 0.5 of it 37.5 Wh', () => {
    const used = (speed: number): number => {
      const sea = startSea(seaPlan());
      run(sea, 3600, () => ({ heading_deg: 0, speed_mps: speed }));
      return sea.truth.energyJ[0]! / 3600;
    };
    expect(used(1.5)).toBeCloseTo(90, 6);
    expect(used(0.75)).toBeCloseTo(30 + 60 / 8, 6);
  });

  it('drift with the water once their battery is empty', () => {
    const sea = startSea(seaPlan({ vehicles: [vehiclePlan({ batteryJ: 900 })] }));
    run(sea, 100, () => north);
    expect(sea.truth.battery[0]).toBe(0);
    expect(sea.truth.speedMps[0]).toBe(0);
  });
});

describe('sensors', () => {
  it('give a fix every period, from the drawn moment of the first on, and its latency later', () => {
    const sea = startSea(seaPlan({ vehicles: [vehiclePlan({ fixLatencyS: 7 })] }));
    const got: [number, number][] = [];
    for (let tick = 0; tick < 1500; tick++) {
      const sense = sea.perceive()[0]!;
      if (sense.fix !== null) got.push([tick, sense.fix.at_s]);
      sea.advance([steerTo(tick, north)]);
    }
    expect(got).toHaveLength(5);
    for (const [tick, atS] of got) expect(tick - atS).toBe(7);
    expect(new Set(got.slice(1).map(([tick], index) => tick - got[index]![0])).size).toBe(1);
  });

  it('tell the onboard clock, offset and drift included', () => {
    const sea = startSea(seaPlan({ vehicles: [vehiclePlan({ clockOffsetS: 2.5, clockDriftRatio: 1e-4 })] }));
    run(sea, 1000, () => north);
    expect(sea.perceive()[0]!.at_s).toBeCloseTo(1000 * (1 + 1e-4) + 2.5, 9);
  });

  it('draw alike for a vehicle whatever the fleet beside it', () => {
    const two = [vehiclePlan({ compassSigmaRad: 0.01, compassBiasRad: null, compassBiasSigmaRad: 0.02 }), vehiclePlan({ name: 'cobalt', startEastM: 500 })];
    const alone = startSea(seaPlan({ vehicles: two.slice(0, 1) }));
    const beside = startSea(seaPlan({ vehicles: two }));
    for (let tick = 0; tick < 50; tick++) {
      expect(beside.perceive()[0]).toEqual(alone.perceive()[0]);
      alone.advance([steerTo(tick, north)]);
      beside.advance([steerTo(tick, north), steerTo(tick, north)]);
    }
  });
});

const five = (): SeaPlan['vehicles'] => ['amber', 'cobalt', 'jade', 'ochre', 'umber'].map((name, index) =>
  vehiclePlan({ name, startEastM: 300 * index, fixEveryS: 1e6 }));

describe('the modem', () => {
  it('sends in the own slot, and the last bit arrives after turn-on, air time and travel (METHODS A8)', () => {
    const sea = startSea(seaPlan({ vehicles: five() }));
    const hearings = run(sea, 40, (sense) => ({ heading_deg: 0, speed_mps: 0, say: sense.tick === 3 ? FRAME : null }));
    const last = hearings.find(({ fromIndex, toIndex }) => fromIndex === 4 && toIndex === 0)!;
    expect(last.sentS).toBe(16);
    // 32 B at 640 bit/s is 0.4 s; 1200 m at Mackenzie's speed for 9 degC, 35.2, 90 m.
    const sound = 1448.96 + 4.591 * 9 - 5.304e-2 * 81 + 2.374e-4 * 729 + 1.34 * 0.2 + 1.63e-2 * 90 + 1.675e-7 * 8100 - 1.025e-2 * 9 * 0.2 - 7.139e-13 * 9 * 90 ** 3;
    expect(last.heardS).toBeCloseTo(16 + 0.2 + 0.4 + 1200 / sound, 9);
    expect(hearings).toHaveLength(20);
  });

  it('gives every frame said one fate per other vehicle; a repeat adds one, and nothing is heard before it can be', () => {
    const links = fc.record({
      loss: fc.constantFrom(0, 0.3, 0.9), burst: fc.constantFrom(1, 4), delayS: fc.constantFrom(0, 2), jitterS: fc.constantFrom(0, 1),
      repeat: fc.constantFrom(0, 0.3), garble: fc.constantFrom(0, 0.2),
    });
    fc.assert(fc.property(links, fc.integer({ min: 0, max: 1e6 }), (link, seed) => {
      const plan = seaPlan({ vehicles: five(), seed });
      const sea = startSea({ ...plan, modem: { ...plan.modem, link } });
      const hearings = run(sea, 400, (sense) => ({ heading_deg: 0, speed_mps: 0, say: sense.tick < 360 ? FRAME : null }));
      const firsts = new Map<string, number>();
      for (const hearing of hearings) {
        const key = `${hearing.sentS}/${hearing.fromIndex}/${hearing.toIndex}`;
        firsts.set(key, (firsts.get(key) ?? 0) + 1);
        if (hearing.heardS !== null) expect(hearing.heardS).toBeGreaterThan(hearing.sentS + 0.6);
      }
      expect(firsts.size).toBe(4 * sea.framesSent);
      const repeats = hearings.length - firsts.size;
      if (link.repeat === 0) expect(repeats).toBe(0);
    }), { numRuns: 15 });
  });

  it('is deaf while it sends, and two frames that overlap at a hearer are lost to it both', () => {
    const plan = seaPlan({ vehicles: five() });
    // Slots too short for the frame: neighbours in the round talk over each other.
    const sea = startSea({ ...plan, modem: { ...plan.modem, slotS: 0.3 } });
    const hearings = run(sea, 30, () => ({ heading_deg: 0, speed_mps: 0, say: FRAME }));
    const fates = new Set(hearings.map(({ fate }) => fate));
    expect(fates).toContain('collided');
    expect(fates).toContain('deaf');
  });
});

describe('faults', () => {
  it('take an agent down for its span: no sense, nothing said or heard, the body keeps its last order', () => {
    const plan = seaPlan({ vehicles: five(), faults: [{ kind: 'reboot', atS: 30, untilS: 60, vehicles: [1], memory: 'lost' }] });
    const sea = startSea(plan);
    const ups: string[] = [];
    const hearings: Hearing[] = [];
    for (let tick = 0; tick < 120; tick++) {
      for (const { index, phase } of sea.reboots()) ups.push(`${tick} ${index} ${phase}`);
      const senses = sea.perceive();
      expect(senses[1] === null).toBe(tick >= 30 && tick < 60);
      sea.advance(senses.map((sense) => (sense === null ? null : steerTo(tick, { ...north, say: FRAME, heard: sense.heard.length }))));
      hearings.push(...sea.takeHearings());
    }
    expect(ups).toEqual(['30 1 down', '60 1 up']);
    expect(hearings.filter(({ fromIndex, sentS }) => fromIndex === 1 && sentS >= 30 && sentS < 60)).toEqual([]);
    expect(hearings.filter(({ toIndex, sentS }) => toIndex === 1 && sentS > 31 && sentS < 58).every(({ fate }) => fate === 'deaf')).toBe(true);
    expect(sea.truth.northM[1]).toBeCloseTo(sea.truth.northM[0]!, 9);
  });

  it('replace what they upset for their span, the later line winning, and say when they take effect', () => {
    const plan = seaPlan({
      faults: [
        { kind: 'compass', atS: 10, untilS: 30, vehicles: [0], how: 'step', amount: 0.1 },
        { kind: 'compass', atS: 20, untilS: 25, vehicles: [0], how: 'bias', amount: -0.2 },
        { kind: 'log', atS: 10, untilS: 20, vehicles: [0], how: 'scale', amount: 0.05 },
      ],
      orders: [{ atS: 12, vehicles: [0], order: 'home' }],
    });
    const sea = startSea(plan);
    const bias: number[] = [];
    const orders: string[] = [];
    const changes: string[] = [];
    for (let tick = 0; tick < 35; tick++) {
      bias.push(sea.truth.compassBiasRad[0]!);
      const sense = sea.perceive()[0]!;
      orders.push(...sense.orders.map((order) => `${tick} ${order}`));
      changes.push(...sea.changes().map(({ what, index, phase }) => `${tick} ${what} ${index} ${phase}`));
      sea.advance([steerTo(tick, north)]);
    }
    expect([bias[9], bias[10], bias[20], bias[25], bias[30]]).toEqual([0, 0.1, -0.2, 0.1, 0]);
    expect(orders).toEqual(['12 home']);
    expect(changes).toEqual([
      '10 fault 0 begins', '10 fault 2 begins', '12 order 0 given', '20 fault 1 begins', '20 fault 2 ends', '25 fault 1 ends', '30 fault 0 ends',
    ]);
  });

  it('set the loss of the links that they name, and no others', () => {
    const plan = seaPlan({
      vehicles: five(),
      faults: [{ kind: 'link', atS: 0, untilS: 1e9, from: [0], to: [1, 2], change: { loss: 1 } }],
    });
    const hearings = run(startSea(plan), 200, () => ({ heading_deg: 0, speed_mps: 0, say: FRAME }));
    for (const { fromIndex, toIndex, fate } of hearings) {
      expect(fate).toBe(fromIndex === 0 && (toIndex === 1 || toIndex === 2) ? 'dropped-by-fault' : 'heard');
    }
  });
});
