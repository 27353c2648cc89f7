/** Known answers of Philox4x32-10: quoted from the generator authors' kat_vectors (METHODS A11). */
import { describe, expect, it } from 'vitest';
import { PURPOSE, normalPair, philox, startDraw, uniform } from '../../../hil-sim/sea/draw.ts';

const hex = (words: Uint32Array): string[] => Array.from(words, (word) => word.toString(16).padStart(8, '0'));

describe('philox', () => {
  it.each([
    ['zeros', [0, 0, 0, 0], [0, 0], '6627e8d5 e169c58d bc57ac4c 9b00dbd8'],
    ['ones', [0xffffffff, 0xffffffff, 0xffffffff, 0xffffffff], [0xffffffff, 0xffffffff], '408f276d 41c83b0e a20bc7c6 6d5451fd'],
    ['pi', [0x243f6a88, 0x85a308d3, 0x13198a2e, 0x03707344], [0xa4093822, 0x299f31d0], 'd16cfe09 94fdcceb 5001e420 24126ea1'],
  ])('gives the published answer for %s', (_name, counter, key, expected) => {
    const out = new Uint32Array(4);
    philox(Uint32Array.from(counter), Uint32Array.from(key), out);
    expect(hex(out).join(' ')).toBe(expected);
  });
});

describe('uniform and normalPair', () => {
  it('are functions of seed, entity, purpose and count, and of nothing else', () => {
    const of = { entity: 3, purpose: PURPOSE.linkLoss, count: 17 };
    const first = uniform(startDraw(9), of);
    const draw = startDraw(9);
    for (let count = 0; count < 50; count++) uniform(draw, { ...of, count });
    expect(uniform(draw, of)).toBe(first);
    expect(uniform(startDraw(10), of)).not.toBe(first);
    expect(uniform(draw, { ...of, entity: 4 })).not.toBe(first);
    expect(uniform(draw, { ...of, purpose: PURPOSE.linkGarble })).not.toBe(first);
  });

  it('have the moments of their distributions, and neighbours are independent', () => {
    const draw = startDraw(5);
    const count = 40_000;
    const pair = new Float64Array(2);
    let [sum, square, fourth, product, cross, before] = [0, 0, 0, 0, 0, 0];
    for (let at = 0; at < count; at++) {
      normalPair(draw, { entity: 1, purpose: PURPOSE.compassNoise, count: at }, pair);
      sum += pair[0]!;
      square += pair[0]! ** 2;
      fourth += pair[0]! ** 4;
      product += pair[0]! * pair[1]!;
      cross += pair[0]! * before;
      before = pair[0]!;
    }
    // Five standard errors of each mean: 1/√n, √2/√n, √96/√n, 1/√n, 1/√n.
    const error = 5 / Math.sqrt(count);
    expect(Math.abs(sum / count)).toBeLessThan(error);
    expect(Math.abs(square / count - 1)).toBeLessThan(error * Math.SQRT2);
    expect(Math.abs(fourth / count - 3)).toBeLessThan(error * Math.sqrt(96));
    expect(Math.abs(product / count)).toBeLessThan(error);
    expect(Math.abs(cross / count)).toBeLessThan(error);
  });

  it('fill the unit interval evenly: chi-square of 256 cells below its 99.9 % point, 330.52 (255 degrees; handbook tables)', () => {
    const draw = startDraw(77);
    for (const lane of [0, 1, 2, 3]) {
      const cells = new Float64Array(256);
      let [least, most] = [1, 0];
      for (let count = 0; count < 25_600; count++) {
        const value = uniform(draw, { entity: 2, purpose: PURPOSE.linkLoss, count }, lane);
        least = Math.min(least, value);
        most = Math.max(most, value);
        cells[Math.floor(256 * value)]! += 1;
      }
      expect(least > 0 && most < 1).toBe(true);
      expect(cells.reduce((sum, cell) => sum + (cell - 100) ** 2 / 100, 0)).toBeLessThan(330.52);
    }
  });

  it('are independent between seeds, entities, purposes and lanes: no correlation beyond five standard errors', () => {
    const count = 10_000;
    const stream = (seed: number, entity: number, purpose: 1 | 2 | 8, lane: number): number[] => {
      const draw = startDraw(seed);
      return Array.from({ length: count }, (_none, at) => uniform(draw, { entity, purpose, count: at }, lane) - 0.5);
    };
    const streams = [
      stream(1, 0, 1, 0), stream(2, 0, 1, 0), stream(1, 1, 1, 0), stream(1, 0, 2, 0), stream(1, 0, 8, 0), stream(1, 0, 1, 1),
      stream(4_294_967_295, 0, 1, 0), stream(1, 16, 8, 0), stream(1, 0, 1, 3),
    ];
    for (let a = 0; a < streams.length; a++) {
      for (let b = 0; b < a; b++) {
        const product = streams[a]!.reduce((sum, value, at) => sum + value * streams[b]![at]!, 0) / count;
        expect(Math.abs(product * 12)).toBeLessThan(5 / Math.sqrt(count));
      }
    }
  });
});
