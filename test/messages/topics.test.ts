import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { name } from '../../messages/fields.ts';
import {
  SEA_TOPICS, VEHICLE_TOPICS, benchNameFrom, everyVehicle, isBenchName, readTopic, seaTopic, vehicleTopic,
} from '../../messages/topics.ts';

/** The fixed topics, written out as the design lists them. */
const FIXED = [
  'drywake/marrow-bank/amber/mission', 'drywake/marrow-bank/amber/sense', 'drywake/marrow-bank/amber/steer',
  'drywake/marrow-bank/amber/status', 'drywake/marrow-bank/amber/orders', 'drywake/marrow-bank/sea/tick',
  'drywake/marrow-bank/sea/truth', 'drywake/marrow-bank/sea/faults', 'drywake/marrow-bank/sea/outcome',
  'drywake/marrow-bank/sea/ask', 'drywake/marrow-bank/sea/answer',
];

describe('topics', () => {
  it('are the fixed ones, all of them and no other', () => {
    const built = [
      ...VEHICLE_TOPICS.map((what) => vehicleTopic('marrow-bank', 'amber', what)),
      ...SEA_TOPICS.map((what) => seaTopic('marrow-bank', what)),
    ];
    expect(built).toEqual(FIXED);
    expect(everyVehicle('marrow-bank', 'steer')).toBe('drywake/marrow-bank/+/steer');
  });

  it('are taken apart into what they were built from', () => {
    for (const what of VEHICLE_TOPICS) {
      expect(readTopic(vehicleTopic('b-1', 'amber', what))).toEqual({ of: 'vehicle', bench: 'b-1', vehicle: 'amber', what });
    }
    for (const what of SEA_TOPICS) expect(readTopic(seaTopic('b-1', what))).toEqual({ of: 'sea', bench: 'b-1', what });
  });

  it.each([
    '', '/', 'drywake', 'drywake/b', 'drywake/b/amber', 'drywake/b/amber/', 'drywake/b/amber/steer/', 'drywake/b/amber/steer/x',
    '/drywake/b/amber/steer', 'Drywake/b/amber/steer', 'other/b/amber/steer', 'drywake/b/amber/truth', 'drywake/b/sea/steer',
    'drywake/b/sea/', 'drywake/B/amber/steer', 'drywake/b/Amber/steer', 'drywake/b/+/steer', 'drywake/+/amber/steer',
    'drywake/b/amber/#', 'drywake//amber/steer', 'drywake/b//steer', 'drywake/b/amber/toString', 'drywake/b/amber/__proto__',
  ])('that are none of ours are refused: %s', (topic) => {
    expect(readTopic(topic)).toBeNull();
  });

  it('are never made up: what is read builds the same text again, for any text', () => {
    const part = fc.oneof(fc.string(), fc.constantFrom('drywake', 'sea', 'amber', 'steer', 'tick', 'b'));
    fc.assert(fc.property(fc.array(part, { maxLength: 6 }), (parts) => {
      const topic = parts.join('/');
      const reading = readTopic(topic);
      if (reading === null) return;
      expect(reading.of === 'sea'
        ? seaTopic(reading.bench, reading.what)
        : vehicleTopic(reading.bench, reading.vehicle, reading.what)).toBe(topic);
    }));
  });
});

describe('the name of a vehicle', () => {
  it.each([
    ['amber', true], ['amber-2', true], ['seal', true], ['sea', false], ['Amber', false], ['2a', false], ['', false],
    ['a'.repeat(24), true], ['a'.repeat(25), false], ['a/b', false], ['a+', false], ['a\n', false],
  ])('%j may stand: %s', (text, may) => {
    expect(name.safeParse(text).success).toBe(may);
    if (may) expect(readTopic(vehicleTopic('b', text, 'steer'))).toMatchObject({ vehicle: text });
  });
});

describe('names of benches', () => {
  it.each([
    ['marrow-bank', true], ['smoke_2', true], ['7', true], ['a'.repeat(64), true], ['a'.repeat(65), false], ['', false],
    ['Marrow', false], ['-a', false], ['a b', false], ['a/b', false], ['a+', false], ['#', false], ['a\n', false], ['é', false],
  ])('%j may stand: %s', (name, may) => {
    expect(isBenchName(name)).toBe(may);
  });

  it.each([
    ['Marrow Bank', 'marrow-bank'], ['smoke', 'smoke'], ['--x', 'x'], ['', 'bench'], ['…', 'bench'], ['été 3', 't-3'],
  ])('%j becomes %j', (text, name) => {
    expect(benchNameFrom(text)).toBe(name);
  });

  it('come out allowed from any text, and unchanged from an allowed one', () => {
    fc.assert(fc.property(fc.oneof(fc.string({ maxLength: 100 }), fc.string({ unit: 'binary' })), (text) => {
      const name = benchNameFrom(text);
      expect(isBenchName(name)).toBe(true);
      expect(benchNameFrom(name)).toBe(name);
    }));
  });
});
