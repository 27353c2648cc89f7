/** Exact factors: international nautical mile 1852 m (1929), knot one an hour, watt hour 3600 J (SI brochure). */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { formatQuantity, parseQuantity, unitsOf, type Dimension } from '../../messages/units.ts';

const value = (text: string, dimension: Dimension): number | string => {
  const reading = parseQuantity(text, dimension);
  return reading.ok ? reading.value : reading.reason;
};

const ROWS: [string, Dimension, number][] = [
  ['600 m', 'length', 600], ['600m', 'length', 600], ['2 nmi', 'length', 3704], ['1.5 km', 'length', 1500],
  ['2 kn', 'speed', (2 * 1852) / 3600], ['1.2 m/s', 'speed', 1.2], ['40 deg', 'angle', (40 * Math.PI) / 180],
  ['-90°', 'angle', -Math.PI / 2], ['5 deg/s', 'angleRate', Math.PI / 36], ['5 h 50 min', 'time', 21_000], ['90 s', 'time', 90],
  ['250 ms', 'time', 0.25], ['2.0 kWh', 'energy', 7.2e6], ['25 kHz', 'frequency', 25_000], ['640 bit/s', 'bitRate', 640],
  ['30 %', 'share', 0.3], ['20 ppm', 'clockDrift', 2e-5], ['32 B', 'size', 32], ['9 degC', 'temperature', 9], ['1e3 m', 'length', 1000],
];

describe('parseQuantity', () => {
  it.each(ROWS)('reads %s', (text, dimension, expected) => {
    const found = value(text, dimension);
    expect(found).toBeTypeOf('number');
    expect(Math.abs((found as number) - expected)).toBeLessThanOrEqual(1e-15 * Math.abs(expected));
  });

  it.each([
    ['600', 'length', 'has no unit'], ['600 kg', 'length', 'unit \'kg\''], ['600 s', 'length', 'unit \'s\''], ['NaN m', 'length', 'not a quantity'],
    ['Infinity m', 'length', 'not a quantity'], ['1e999 m', 'length', 'not finite'], ['', 'length', 'not a quantity'], ['5 m 3 m', 'length', 'more than one part'],
    ['5 h -3 min', 'time', 'more than one part'], ['m', 'length', 'not a quantity'], ['1,5 m', 'length', 'unit'], ['5 __proto__', 'length', 'unit'],
    ['5 constructor', 'length', 'unit'],
  ] as [string, Dimension, string][])('refuses %s as a %s and says what is allowed', (text, dimension, reason) => {
    const found = value(text, dimension);
    expect(found).toContain(reason);
    expect(found).toContain(unitsOf(dimension)[0]!);
  });

  it('never throws, whatever the text', () => {
    fc.assert(fc.property(fc.string(), (text) => {
      expect(['number', 'string']).toContain(typeof value(text, 'time'));
    }));
  });
});

describe('formatQuantity', () => {
  it('writes what people write', () => {
    expect([formatQuantity(600, 'length'), formatQuantity(0.3, 'share'), formatQuantity((40 * Math.PI) / 180, 'angle')]).toEqual(['600 m', '30 %', '40 deg']);
    expect([formatQuantity(21_600, 'time'), formatQuantity(300, 'time'), formatQuantity(0, 'time'), formatQuantity(7.2e6, 'energy')]).toEqual(['6 h', '5 min', '0 s', '2 kWh']);
  });

  const dimensions: Dimension[] = ['length', 'speed', 'time', 'energy', 'power', 'frequency', 'bitRate', 'level', 'size', 'temperature'];
  it.each(dimensions)('gives every %s back to the last bit', (dimension) => {
    fc.assert(fc.property(fc.double({ min: -1e9, max: 1e9, noNaN: true }), (number) => {
      expect(value(formatQuantity(number, dimension), dimension)).toBe(number + 0);
    }));
  });

  it.each(['angle', 'share', 'angleRate', 'clockDrift'] as const)('gives every %s back to the last bit that came from a text', (dimension) => {
    fc.assert(fc.property(fc.integer({ min: -360_000, max: 360_000 }), (thousandths) => {
      const read = value(`${thousandths / 1000} ${unitsOf(dimension)[0]!}`, dimension) as number;
      expect(value(formatQuantity(read, dimension), dimension)).toBe(read);
    }));
  });
});
