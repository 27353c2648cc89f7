/** Check values: catalogue of parametrised CRC algorithms, CRC-16/IBM-3740 (METHODS A9); empty and 00 recomputed there. */
import { describe, expect, it } from 'vitest';
import { crc16 } from '../../messages/crc.ts';

const ascii = (text: string): Uint8Array => new TextEncoder().encode(text);

describe('crc16', () => {
  it.each([
    ['123456789', ascii('123456789'), 0x29b1],
    ['nothing', new Uint8Array(0), 0xffff],
    ['one zero byte', new Uint8Array(1), 0xe1f0],
  ])('gives the published check value of %s', (_name, bytes, expected) => {
    expect(crc16(bytes)).toBe(expected);
  });

  it('is none of the other algorithms that are called CRC-16/CCITT', () => {
    expect([0x31c3, 0x2189, 0x906e]).not.toContain(crc16(ascii('123456789')));
  });

  it('covers only the bytes before its end', () => {
    expect(crc16(ascii('123456789?'), 9)).toBe(0x29b1);
  });
});
