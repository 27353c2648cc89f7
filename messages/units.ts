/**
 * Quantities as people write them, to SI numbers and back. Angles become radians, shares become parts
 * of one. Factors are exact by definition: the international nautical mile is 1852 m, a knot one of
 * them an hour, a watt hour 3600 J (SI brochure, 9th edition, tables 6 and 8).
 *
 * A factor that is a power of ten only moves the decimal point before the text is read, so such a
 * reading is correctly rounded ("7 %" is the double nearest 0.07). Every dimension has a unit of factor
 * one or a power of ten; so every finite double has a text that reads back as the very same, and a
 * resolved trial repeats its run to the last bit.
 */
import { assert } from './assert.ts';

const RAD_PER_DEG = Math.PI / 180;

/** A factor to SI, or a power of ten. */
type Factor = number | `e${number}`;

/** Units of each dimension with their factor to SI; the first is the one that files use most. */
const UNITS = {
  length: { m: 1, km: 'e3', cm: 'e-2', nmi: 1852 },
  speed: { 'm/s': 1, 'cm/s': 'e-2', kn: 1852 / 3600, 'km/h': 1 / 3.6 },
  angle: { deg: RAD_PER_DEG, '°': RAD_PER_DEG, rad: 1 },
  angleRate: { 'deg/s': RAD_PER_DEG, '°/s': RAD_PER_DEG, 'rad/s': 1 },
  angleDrift: { 'deg/h': RAD_PER_DEG / 3600, 'rad/s': 1 },
  time: { s: 1, ms: 'e-3', min: 60, h: 3600, d: 86_400 },
  energy: { J: 1, Wh: 3600, kWh: 3.6e6 },
  power: { W: 1, kW: 'e3' },
  frequency: { Hz: 1, kHz: 'e3' },
  bitRate: { 'bit/s': 1, 'kbit/s': 'e3' },
  level: { dB: 1 },
  share: { '%': 'e-2' },
  clockDrift: { ppm: 'e-6' },
  size: { B: 1 },
  temperature: { degC: 1 },
  rate: { '/min': 1 / 60, '/s': 1, '/h': 1 / 3600 },
} as const satisfies Record<string, Record<string, Factor>>;

export type Dimension = keyof typeof UNITS;

export const DIMENSIONS = Object.keys(UNITS) as readonly Dimension[];

/** `reason` is `found` and `allowed` as one sentence. */
export type QuantityReading =
  | { readonly ok: true; readonly value: number }
  | { readonly ok: false; readonly found: string; readonly allowed: string; readonly reason: string };

/** Units that people prefer for a size, largest first, where the first of the table is not always best. */
const FRIENDLY: Partial<Record<Dimension, readonly string[]>> = {
  time: ['h', 'min', 's'],
  energy: ['kWh', 'Wh', 'J'],
  frequency: ['kHz', 'Hz'],
};
/** A friendly text has at most so many digits; longer ones are easier to read in the plain unit. */
const FEW_DIGITS = 6;
/** A double is told apart by 17 significant digits (IEEE 754). */
const DOUBLE_DIGITS = 17;
const SAID_DIGITS = 4;
const LONGEST = 100;

const NUMBER = '[+-]?(?:\\d+\\.?\\d*|\\.\\d+)(?:[eE][+-]?\\d+)?';
const BARE = new RegExp(`^${NUMBER}$`);
const PART = new RegExp(`^(${NUMBER})\\s*([^\\s\\d.+-][^\\s\\d]*)\\s*`);

/** The units that a dimension may be written in. */
export function unitsOf(dimension: Dimension): readonly string[] {
  return Object.keys(UNITS[dimension]);
}

/** What a quantity of this dimension must look like, for error messages. */
export function wantedQuantity(dimension: Dimension): string {
  return `must be a number with a unit (${unitsOf(dimension).join(', ')})`;
}

function factorOf(unit: string, dimension: Dimension): Factor | undefined {
  const factors: Record<string, Factor> = UNITS[dimension];
  return Object.hasOwn(factors, unit) ? factors[unit] : undefined;
}

/** The decimal text of a number with its point moved by a power of ten, exactly. */
function shifted(number: string, places: number): string {
  const [digits, exponent] = number.toLowerCase().split('e');
  return `${digits}e${Number(exponent ?? 0) + places}`;
}

function inSi(number: string, factor: Factor): number {
  if (typeof factor === 'number') return Number(number) * factor;
  return Number(shifted(number, Number(factor.slice(1))));
}

/** The size of a unit in SI, for comparisons. */
function sizeOf(factor: Factor): number {
  return typeof factor === 'number' ? factor : Number(`1${factor}`);
}

/**
 * `"600 m"` to 600; the space is optional. Times may have parts, from large units to small
 * (`"5 h 50 min"`). A bare number, another unit, NaN and infinity are refused with what is allowed.
 */
export function parseQuantity(text: string, dimension: Dimension): QuantityReading {
  const refuse = (found: string): QuantityReading => {
    const allowed = wantedQuantity(dimension);
    return { ok: false, found, allowed, reason: `${found}, but ${allowed}` };
  };
  if (text.length > LONGEST) return refuse(`is a text of ${text.length} characters`);
  let rest = text.trim();
  let value = 0;
  let lastSize = Infinity;
  while (rest !== '' || lastSize === Infinity) {
    const match = PART.exec(rest);
    if (match === null) {
      return refuse(`is '${text}', which ${BARE.test(rest) ? 'has no unit' : 'is no quantity'}`);
    }
    const [whole, number, unit] = match as unknown as [string, string, string];
    const factor = factorOf(unit, dimension);
    if (factor === undefined) return refuse(`is '${text}' with the unit '${unit}'`);
    const part = inSi(number, factor);
    if (!Number.isFinite(part)) return refuse(`is '${text}', which is not finite`);
    if (lastSize !== Infinity) {
      const size = sizeOf(factor);
      if (dimension !== 'time') return refuse(`is '${text}', which has more than one part`);
      if (!(size < lastSize)) return refuse(`is '${text}', whose parts do not go from large to small`);
      if (value < 0 || /^[+-]/.test(number)) return refuse(`is '${text}', a sum of parts with a sign`);
    }
    value += part;
    lastSize = sizeOf(factor);
    rest = rest.slice(whole.length);
  }
  return { ok: true, value: value + 0 };
}

function readsBack(text: string, value: number, dimension: Dimension): boolean {
  const back = parseQuantity(text, dimension);
  return back.ok && Object.is(back.value, value);
}

/** The shortest text in `unit` that reads back as `value`, or null if the unit has none. */
function textIn(value: number, unit: string, dimension: Dimension): string | null {
  const factor = factorOf(unit, dimension)!;
  if (typeof factor === 'string') {
    const moved = shifted(String(value), -Number(factor.slice(1)));
    const plain = `${Number(moved)} ${unit}`;
    return readsBack(plain, value, dimension) ? plain : `${moved} ${unit}`;
  }
  if (factor === 1) return `${value} ${unit}`;
  for (let digits = 1; digits <= DOUBLE_DIGITS; digits++) {
    const text = `${Number((value / factor).toPrecision(digits))} ${unit}`;
    if (readsBack(text, value, dimension)) return text;
  }
  return null;
}

/** Whether a text has few digits and does not begin with zero. */
function isShort(text: string): boolean {
  return text.replace(/\D/g, '').length <= FEW_DIGITS && !/^-?0\./.test(text);
}

/** A text for `value` (finite, SI) that `parseQuantity` turns back into the identical double; −0 is 0. */
export function formatQuantity(value: number, dimension: Dimension): string {
  assert(Number.isFinite(value), 'a quantity is finite');
  const plain = value + 0;
  for (const unit of plain === 0 ? [] : (FRIENDLY[dimension] ?? [])) {
    const text = textIn(plain, unit, dimension);
    if (text !== null && isShort(text)) return text;
  }
  for (const unit of unitsOf(dimension)) {
    const text = textIn(plain, unit, dimension);
    if (text !== null) return text;
  }
  throw new Error(`${dimension} has no unit that gives every number back`);
}

/** `value` (finite, in SI) rounded to what a sentence needs: four digits, in the unit that suits its size. */
export function sayQuantity(value: number, dimension: Dimension): string {
  assert(Number.isFinite(value), 'a quantity is finite');
  const units = FRIENDLY[dimension] ?? unitsOf(dimension).slice(0, 1);
  const said = units.map((unit) => {
    const exact = value / sizeOf(factorOf(unit, dimension)!);
    const rounded = Number(exact.toPrecision(SAID_DIGITS));
    const isPlain = rounded === exact && Math.abs(exact) < 1000;
    return { text: `${rounded + 0} ${unit}`, isLarge: Math.abs(rounded) >= 1, isPlain };
  });
  const large = said.filter((one) => one.isLarge);
  return (large.find((one) => one.isPlain) ?? large[0] ?? said.at(-1)!).text;
}
