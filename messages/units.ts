/**
 * Quantities as people write them, to SI numbers and back. Angles become radians, shares become parts
 * of one. Factors are exact by definition: the international nautical mile is 1852 m, a knot one of
 * them an hour, a watt hour 3600 J.
 *
 * `formatQuantity` gives a text that parses back to the very same double, so that a resolved trial
 * repeats its run to the last bit.
 */

const KNOT_MPS = 1852 / 3600;
const RAD_PER_DEG = Math.PI / 180;

/** Units of each dimension with their factor to SI; the first of a list is what `formatQuantity` writes. */
const UNITS = {
  length: { m: 1, km: 1000, cm: 0.01, nmi: 1852 },
  speed: { 'm/s': 1, 'cm/s': 0.01, kn: KNOT_MPS, 'km/h': 1 / 3.6 },
  angle: { deg: RAD_PER_DEG, '°': RAD_PER_DEG, rad: 1 },
  angleRate: { 'deg/s': RAD_PER_DEG, '°/s': RAD_PER_DEG, 'rad/s': 1 },
  time: { s: 1, ms: 0.001, min: 60, h: 3600, d: 86400 },
  energy: { J: 1, Wh: 3600, kWh: 3.6e6 },
  power: { W: 1, kW: 1000 },
  frequency: { Hz: 1, kHz: 1000 },
  bitRate: { 'bit/s': 1, 'kbit/s': 1000 },
  level: { dB: 1 },
  share: { '%': 0.01 },
  clockDrift: { ppm: 1e-6 },
  angleDrift: { 'deg/h': RAD_PER_DEG / 3600 },
  size: { B: 1 },
  temperature: { degC: 1 },
  rate: { '/min': 1 / 60, '/s': 1, '/h': 1 / 3600 },
} as const satisfies Record<string, Record<string, number>>;

export type Dimension = keyof typeof UNITS;

export type QuantityReading =
  { readonly ok: true; readonly value: number } | { readonly ok: false; readonly reason: string };

const NUMBER = '[+-]?(?:\\d+\\.?\\d*|\\.\\d+)(?:[eE][+-]?\\d+)?';
const PART = new RegExp(`^\\s*(${NUMBER})\\s*([^\\s\\d.+-][^\\s\\d]*)`);
const LONGEST = 100;

/** The units that a dimension may be written in, for error messages. */
export function unitsOf(dimension: Dimension): readonly string[] {
  return Object.keys(UNITS[dimension]);
}

/** An example of a quantity of this dimension, for error messages. */
function example(dimension: Dimension): string {
  return `a number with a unit (${unitsOf(dimension).join(', ')})`;
}

/**
 * `"600 m"` to 600; times may have parts (`"5 h 50 min"`). The space is optional. A bare number, another
 * unit, NaN or infinity is refused with what is allowed.
 */
export function parseQuantity(text: string, dimension: Dimension): QuantityReading {
  const factors: Record<string, number> = UNITS[dimension];
  const refuse = (found: string): QuantityReading => ({
    ok: false,
    reason: `${found}, but must be ${example(dimension)}`,
  });
  if (text.length > LONGEST) return refuse('is too long');
  let rest = text.trim();
  let total = 0;
  let parts = 0;
  while (rest !== '' || parts === 0) {
    const match = PART.exec(rest);
    if (match === null) {
      return refuse(
        new RegExp(`^${NUMBER}$`).test(rest) ? `'${text}' has no unit` : `'${text}' is not a quantity`,
      );
    }
    const unit = match[2]!;
    const factor = Object.hasOwn(factors, unit) ? factors[unit] : undefined;
    if (factor === undefined) return refuse(`'${text}' has the unit '${unit}'`);
    const value = Number(match[1]) * factor;
    if (!Number.isFinite(value)) return refuse(`'${text}' is not finite`);
    if (parts > 0 && (dimension !== 'time' || value < 0)) return refuse(`'${text}' has more than one part`);
    total += value;
    parts += 1;
    rest = rest.slice(match[0].length).trim();
  }
  return { ok: true, value: total + 0 };
}

/** SI values whose double can be written with few digits in a friendlier unit, tried in order. */
const FRIENDLY: Partial<Record<Dimension, readonly string[]>> = {
  time: ['h', 'min', 's'],
  energy: ['kWh', 'Wh', 'J'],
  frequency: ['kHz', 'Hz'],
};
const FEW_DIGITS = 6;

/** The shortest text in `unit` that parses back to `value`, or null. */
function textIn(value: number, unit: string, dimension: Dimension): string | null {
  const factor = (UNITS[dimension] as Record<string, number>)[unit]!;
  const scaled = value / factor;
  for (let digits = 1; digits <= 17; digits++) {
    const text = `${Number(scaled.toPrecision(digits))} ${unit}`;
    const back = parseQuantity(text, dimension);
    if (back.ok && Object.is(back.value, value)) return text;
  }
  return null;
}

/** A text for `value` (finite, SI) that `parseQuantity` turns back into the identical double. */
export function formatQuantity(value: number, dimension: Dimension): string {
  const plain = value + 0;
  for (const unit of plain === 0 ? [] : (FRIENDLY[dimension] ?? [])) {
    const text = textIn(plain, unit, dimension);
    if (text !== null && text.replace(/[^\d]/g, '').length <= FEW_DIGITS && !text.startsWith('0.'))
      return text;
  }
  for (const unit of unitsOf(dimension)) {
    const text = textIn(plain, unit, dimension);
    if (text !== null) return text;
  }
  // Factors other than 1 skip some doubles; the dimensions that files use have a unit of factor 1,
  // or get their values from text in this very unit.
  return `${plain / (UNITS[dimension] as Record<string, number>)[unitsOf(dimension)[0]!]!} ${unitsOf(dimension)[0]!}`;
}
