/**
 * Random numbers as a function of (seed; entity, purpose, count): the counter-based generator
 * Philox4x32-10 (Salmon et al., SC 2011), key (seed, purpose), counter (count, entity, other, block).
 *
 * There is no generator state: a draw never shifts another, so that a new vehicle or sensor leaves
 * every other number as it was. Uniforms have 32 bits and lie strictly between 0 and 1; normals come
 * in pairs by Box and Muller's transform.
 */

const ROUND_0 = 0xd2511f53;
const ROUND_1 = 0xcd9e8d57;
const WEYL_0 = 0x9e3779b9;
const WEYL_1 = 0xbb67ae85;
const ROUNDS = 10;

/** What a number is drawn for; the values are part of every recorded run, so they never change. */
export const PURPOSE = {
  compassBias: 1,
  logScale: 2,
  compassNoise: 3,
  logNoise: 4,
  fixNoise: 5,
  fixOutlier: 6,
  fixStagger: 7,
  linkLoss: 8,
  linkJitter: 9,
  linkRepeat: 10,
  linkGarble: 11,
} as const;

export type Purpose = (typeof PURPOSE)[keyof typeof PURPOSE];

/** High 32 bits of the product of two unsigned 32-bit numbers, from 16-bit halves. */
function mulHigh(a: number, b: number): number {
  const aLow = a & 0xffff;
  const aHigh = a >>> 16;
  const bLow = b & 0xffff;
  const bHigh = b >>> 16;
  const lowHigh = Math.imul(aLow, bHigh);
  const highLow = Math.imul(aHigh, bLow);
  const middle = (Math.imul(aLow, bLow) >>> 16) + (lowHigh & 0xffff) + (highLow & 0xffff);
  return (Math.imul(aHigh, bHigh) + (lowHigh >>> 16) + (highLow >>> 16) + (middle >>> 16)) >>> 0;
}

/** One block of the generator: counter (four words) and key (two words) to four words in `out`. */
export function philox(counter: Uint32Array, key: Uint32Array, out: Uint32Array): void {
  let c0 = counter[0]!;
  let c1 = counter[1]!;
  let c2 = counter[2]!;
  let c3 = counter[3]!;
  let k0 = key[0]!;
  let k1 = key[1]!;
  for (let round = 0; round < ROUNDS; round++) {
    const high0 = mulHigh(ROUND_0, c0);
    const low0 = Math.imul(ROUND_0, c0) >>> 0;
    const high1 = mulHigh(ROUND_1, c2);
    const low1 = Math.imul(ROUND_1, c2) >>> 0;
    c0 = (high1 ^ c1 ^ k0) >>> 0;
    c1 = low1;
    c2 = (high0 ^ c3 ^ k1) >>> 0;
    c3 = low0;
    k0 = (k0 + WEYL_0) >>> 0;
    k1 = (k1 + WEYL_1) >>> 0;
  }
  out[0] = c0;
  out[1] = c1;
  out[2] = c2;
  out[3] = c3;
}

/** Buffers of one user of the generator; what they hold between calls means nothing. */
export interface Draw {
  readonly seed: number;
  readonly counter: Uint32Array;
  readonly key: Uint32Array;
  readonly words: Uint32Array;
}

/** Which number: of whom (a vehicle, or a pair as from × 16 + to), for what, and the how-manieth. */
export interface DrawOf {
  readonly entity: number;
  readonly purpose: Purpose;
  readonly count: number;
}

/** A drawer for a seed in [0, 2^32). */
export function startDraw(seed: number): Draw {
  return { seed, counter: new Uint32Array(4), key: new Uint32Array(2), words: new Uint32Array(4) };
}

function block(draw: Draw, entity: number, purpose: Purpose, count: number): Uint32Array {
  draw.key[0] = draw.seed;
  draw.key[1] = purpose;
  draw.counter[0] = count;
  draw.counter[1] = entity;
  draw.counter[2] = 0;
  draw.counter[3] = 0;
  philox(draw.counter, draw.key, draw.words);
  return draw.words;
}

/** A word as a number strictly between 0 and 1. */
function unit(word: number): number {
  return (word + 0.5) / 4294967296;
}

/** A uniform number strictly between 0 and 1; `lane` 0 to 3 takes one of four independent ones. */
export function uniform(draw: Draw, of: DrawOf, lane = 0): number {
  return unit(block(draw, of.entity, of.purpose, of.count)[lane]!);
}

/** Two independent standard normals, written to `out`. */
export function normalPair(draw: Draw, of: DrawOf, out: Float64Array): void {
  const words = block(draw, of.entity, of.purpose, of.count);
  const radius = Math.sqrt(-2 * Math.log(unit(words[0]!)));
  const angle = 2 * Math.PI * unit(words[1]!);
  out[0] = radius * Math.cos(angle);
  out[1] = radius * Math.sin(angle);
}
