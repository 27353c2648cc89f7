/**
 * Factors by definition: the international nautical mile is 1852 m (1929), a knot one of them an hour;
 * minute, hour, day and degree as in the SI brochure (BIPM, 9th edition, table 8); a watt hour is 3600 J.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  DIMENSIONS, formatQuantity, parseQuantity, sayQuantity, unitsOf, wantedQuantity, type Dimension,
} from '../../messages/units.ts';

const value = (text: string, dimension: Dimension): number | string => {
  const reading = parseQuantity(text, dimension);
  return reading.ok ? reading.value : reading.reason;
};

/** Text, dimension, SI value: worked out by hand from the definitions above. */
const READ: [string, Dimension, number][] = [
  ['600 m', 'length', 600],
  ['600m', 'length', 600],
  ['  600   m ', 'length', 600],
  ['1e3 m', 'length', 1000],
  ['.5 m', 'length', 0.5],
  ['+2 m', 'length', 2],
  ['1.5 km', 'length', 1500],
  ['35 cm', 'length', 0.35],
  ['2 nmi', 'length', 3704],
  ['1.2 m/s', 'speed', 1.2],
  ['25 cm/s', 'speed', 0.25],
  ['2 kn', 'speed', 1.028888888888889],
  ['36 km/h', 'speed', 10],
  ['180 deg', 'angle', 3.141592653589793],
  ['-90°', 'angle', -1.5707963267948966],
  ['1 rad', 'angle', 1],
  ['360 deg/s', 'angleRate', 6.283185307179586],
  ['648000 deg/h', 'angleDrift', 3.141592653589793],
  ['90 s', 'time', 90],
  ['250 ms', 'time', 0.25],
  ['5 h 50 min', 'time', 21_000],
  ['5h50min', 'time', 21_000],
  ['1 d 2 h 3 min 4 s 5 ms', 'time', 93_784.005],
  ['2.0 kWh', 'energy', 7_200_000],
  ['3 Wh', 'energy', 10_800],
  ['0.03 kW', 'power', 30],
  ['25 kHz', 'frequency', 25_000],
  ['0.64 kbit/s', 'bitRate', 640],
  ['175 dB', 'level', 175],
  ['30 %', 'share', 0.3],
  ['7%', 'share', 0.07],
  ['20 ppm', 'clockDrift', 0.00002],
  ['32 B', 'size', 32],
  ['-1.5 degC', 'temperature', -1.5],
  ['6 /min', 'rate', 0.1],
];

const REFUSED: [string, Dimension, string][] = [
  ['600', 'length', 'has no unit'],
  ['5 h 50', 'time', 'has no unit'],
  ['600 kg', 'length', 'unit \'kg\''],
  ['600 s', 'length', 'unit \'s\''],
  ['600 M', 'length', 'unit \'M\''],
  ['NaN m', 'length', 'no quantity'],
  ['Infinity m', 'length', 'no quantity'],
  ['-inf m', 'length', 'no quantity'],
  ['1e999 m', 'length', 'not finite'],
  ['1e308 km', 'length', 'not finite'],
  ['', 'length', 'no quantity'],
  ['   ', 'length', 'no quantity'],
  ['m', 'length', 'no quantity'],
  ['1,5 m', 'length', 'unit \',\''],
  ['0x10 m', 'length', 'unit \'x\''],
  ['5 m 3 m', 'length', 'more than one part'],
  ['50 min 5 h', 'time', 'from large to small'],
  ['5 h 5 h', 'time', 'from large to small'],
  ['5 h -3 min', 'time', 'parts with a sign'],
  ['-5 h 3 min', 'time', 'parts with a sign'],
  ['5 __proto__', 'length', 'unit \'__proto__\''],
  ['5 constructor', 'length', 'unit \'constructor\''],
  [`${'9'.repeat(200)} m`, 'length', 'is a text of 202 characters'],
];

describe('parseQuantity', () => {
  it.each(READ)('reads %s', (text, dimension, expected) => {
    const found = value(text, dimension);
    expect(found).toBeTypeOf('number');
    // One rounding of the factor, one of the product, one a part: a few parts in 2^52.
    expect(Math.abs((found as number) - expected)).toBeLessThanOrEqual(1e-15 * Math.abs(expected));
  });

  it.each(REFUSED)('refuses %j as a %s and says what is allowed', (text, dimension, found) => {
    expect(value(text, dimension)).toContain(found);
    expect(value(text, dimension)).toContain(`but ${wantedQuantity(dimension)}`);
  });

  it('lists every unit in what it says is allowed', () => {
    expect(value('600', 'length')).toBe('is \'600\', which has no unit, but must be a number with a unit (m, km, cm, nmi)');
  });

  it('rounds once where the factor is a power of ten', () => {
    fc.assert(fc.property(fc.integer({ min: -1e9, max: 1e9 }), (hundredths) => {
      // The decimal fraction as the language reads it is the nearest double (ECMA-262, 12.9.3).
      expect(value(`${hundredths} %`, 'share')).toBe(Number(`${hundredths}e-2`) + 0);
    }));
  });

  it('never throws, whatever the text', () => {
    fc.assert(fc.property(fc.string({ unit: 'binary' }), fc.constantFrom(...DIMENSIONS), (text, dimension) => {
      expect(['number', 'string']).toContain(typeof value(text, dimension));
    }));
  });
});

describe('formatQuantity', () => {
  it.each([
    [600, 'length', '600 m'],
    [1.2, 'speed', '1.2 m/s'],
    [0.3, 'share', '30 %'],
    [0.07, 'share', '7 %'],
    [0.00002, 'clockDrift', '20 ppm'],
    [0.6981317007977318, 'angle', '40 deg'],
    [0.08726646259971647, 'angleRate', '5 deg/s'],
    [21_600, 'time', '6 h'],
    [300, 'time', '5 min'],
    [0, 'time', '0 s'],
    [-0, 'time', '0 s'],
    [0.05, 'time', '0.05 s'],
    [44_714.16, 'time', '12.4206 h'],
    [7_200_000, 'energy', '2 kWh'],
    [25_000, 'frequency', '25 kHz'],
  ] as [number, Dimension, string][])('writes %d as people do', (number, dimension, text) => {
    expect(formatQuantity(number, dimension)).toBe(text);
  });

  it.each(DIMENSIONS)('gives every %s back to the last bit', (dimension) => {
    const anyFinite = fc.double({ noNaN: true, noDefaultInfinity: true });
    const common = fc.double({ min: -1e4, max: 1e4, noNaN: true });
    const smallest = fc.constantFrom(5e-324, -5e-324, Number.MAX_VALUE, Number.EPSILON, 2 ** 53 + 2);
    fc.assert(fc.property(fc.oneof(anyFinite, common, smallest), (number) => {
      expect(Object.is(value(formatQuantity(number, dimension), dimension), number + 0)).toBe(true);
    }), { numRuns: 300 });
  });

  it.each(DIMENSIONS)('keeps the unit of a %s that came from a short text', (dimension) => {
    fc.assert(fc.property(fc.integer({ min: -360_000, max: 360_000 }), (thousandths) => {
      const read = value(`${thousandths / 1000} ${unitsOf(dimension)[0]!}`, dimension) as number;
      const text = formatQuantity(read, dimension);
      expect(value(text, dimension)).toBe(read);
      expect(text.length).toBeLessThanOrEqual(16);
    }));
  });

  it('refuses what is not finite, since no text stands for it', () => {
    for (const number of [NaN, Infinity]) expect(() => formatQuantity(number, 'length')).toThrow('finite');
  });
});

describe('sayQuantity', () => {
  it.each([
    [1.428571, 'time', '1.429 s'],
    [21_000, 'time', '350 min'],
    [100_000, 'time', '27.78 h'],
    [0.087266, 'angleRate', '5 deg/s'],
    [1_224_000, 'energy', '340 Wh'],
    [611.11111, 'length', '611.1 m'],
    [0, 'energy', '0 J'],
  ] as [number, Dimension, string][])('says %d in few digits', (number, dimension, text) => {
    expect(sayQuantity(number, dimension)).toBe(text);
  });
});
