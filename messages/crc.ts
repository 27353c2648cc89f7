/**
 * CRC-16/IBM-3740 (poly 0x1021, init 0xFFFF, not reflected, no final xor), the check bits of an
 * acoustic frame. The name follows the catalogue of parametrised CRC algorithms, since "CCITT" alone
 * is ambiguous. Check value of "123456789": 0x29B1.
 */

const POLYNOMIAL = 0x1021;
const INITIAL = 0xffff;

const TABLE = (() => {
  const table = new Uint16Array(256);
  for (let byte = 0; byte < 256; byte++) {
    let register = byte << 8;
    for (let bit = 0; bit < 8; bit++) {
      register = (register & 0x8000) !== 0 ? (register << 1) ^ POLYNOMIAL : register << 1;
    }
    table[byte] = register & 0xffff;
  }
  return table;
})();

/** CRC-16/IBM-3740 over `bytes[0, endIndex)`; the empty input gives 0xFFFF. */
export function crc16(bytes: Uint8Array, endIndex: number = bytes.length): number {
  let register = INITIAL;
  for (let index = 0; index < endIndex; index++) {
    register = ((register << 8) & 0xffff) ^ TABLE[(register >> 8) ^ bytes[index]!]!;
  }
  return register;
}
