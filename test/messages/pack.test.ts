/**
 * The packed form against bytes written by another program from the words at the head of pack.ts:
 * Python's struct ('<d', '<I', '<B': little-endian IEEE 754 doubles, 32-bit and 8-bit unsigned) and
 * hashlib's SHA-256 (FIPS 180-4). None of the expected values below was made by our own code.
 */
import { createHash } from 'node:crypto';
import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { startDigest } from '../../hil-sim/run/digest.ts';
import { packSense, packSteer, startPacker } from '../../messages/pack.ts';
import { HEARD_MAX, senseSchema } from '../../messages/sense.ts';
import { steerSchema, type Steer } from '../../messages/steer.ts';
import { SENSE_BARE, SENSE_FULL, STEER_BARE, STEER_FULL } from '../support/messages.ts';

const GOLDEN = {
  senseBare: '000000000000000000000000000000000000000000000000000000000000000000000000000000000000f03f'
    + '000000000000000000',
  senseFull: '34120000000000008034b24000000000007c7640000000000000f43f0000000000104440000000000000e03f'
    + '01000000008032b2400000000000228cc00000000000d062400000000000001440'
    + '02000000000000004033b240040000003030666600000000'
    + '2034b24002000000613504000000' + '00010203',
  steerBare: '000000000000000000004440333333333333f33f0000000000000000000001000000' + '0000000000'
    + '000000000000f83f00000000000004c00000000000001040000000000000d0bf0000000000002240000000000000c03f'
    + '000000000000b0bf7b14ae47e17a643f2d431cebe2361a3f92cb7f48bf7d6d3f000000000000e83f000000000000f83f'
    + '000000000000e03f7b14ae47e17a843f7b14ae47e17a743f1100000000',
  steerFullLength: 1724,
  steerFullSha256: '6db28715471688bf8b6f80ad884e6945fe91e1eb52a50c0843abc19907f75921',
  digestOfOneTick: '4748d8aeff120af49df4c505116d9eb83bd69bda11bd49f179f4548a308fb99a',
  digestOfTwoTicksOfTwo: 'd26f2a235f8e76ca8306a87c85cfa0fc33d87212e72b75ce04bc217e245f30bd',
};

const packed = (fill: (packer: ReturnType<typeof startPacker>) => void): Buffer => {
  const packer = startPacker();
  fill(packer);
  return Buffer.from(packer.bytes.subarray(0, packer.length));
};

describe('the packed form', () => {
  it('packs senses to the bytes that the layout says', () => {
    expect(packed((packer) => packSense(packer, SENSE_BARE)).toString('hex')).toBe(GOLDEN.senseBare);
    expect(packed((packer) => packSense(packer, SENSE_FULL)).toString('hex')).toBe(GOLDEN.senseFull);
  });

  it('packs steers to the bytes that the layout says', () => {
    expect(packed((packer) => packSteer(packer, STEER_BARE)).toString('hex')).toBe(GOLDEN.steerBare);
    const full = packed((packer) => packSteer(packer, STEER_FULL));
    expect(full.length).toBe(GOLDEN.steerFullLength);
    expect(createHash('sha256').update(full).digest('hex')).toBe(GOLDEN.steerFullSha256);
  });

  it('starts anew with every message, whatever was packed before', () => {
    expect(packed((packer) => {
      packSteer(packer, STEER_FULL);
      packSense(packer, SENSE_BARE);
    }).toString('hex')).toBe(GOLDEN.senseBare);
  });

  it('packs minus zero as zero, since JSON cannot say it', () => {
    const zero = packed((packer) => packSense(packer, SENSE_BARE));
    expect(packed((packer) => packSense(packer, { ...SENSE_BARE, at_s: -0, heading_deg: -0 })).equals(zero)).toBe(true);
  });

  it('stops at a number that is not one and at a word of no list', () => {
    expect(() => packed((packer) => packSense(packer, { ...SENSE_BARE, at_s: NaN }))).toThrow('assertion failed');
    const state = 'adrift' as Steer['state'];
    expect(() => packed((packer) => packSteer(packer, { ...STEER_BARE, state }))).toThrow('assertion failed');
  });

  it('has room for the largest messages that the schemas let through', () => {
    const heard = Array.from({ length: HEARD_MAX }, () => ({ at_s: 1, bytes: 'ab'.repeat(256) }));
    const sense = senseSchema.parse({ ...SENSE_FULL, heard, orders: new Array(8).fill('hold') });
    const steer = steerSchema.parse({
      ...STEER_FULL, say: 'ab'.repeat(256), heard: new Array(HEARD_MAX).fill('used'), reasons: new Array(8).fill('alone'),
    });
    expect(packed((packer) => packSense(packer, sense)).length).toBe(4 + 40 + 1 + 32 + 4 + 64 * (8 + 4 + 512) + 4 + 8);
    expect(packed((packer) => packSteer(packer, steer)).length).toBeGreaterThan(GOLDEN.steerFullLength);
  });

  it('tells any two senses apart that differ in one number', () => {
    fc.assert(fc.property(fc.double({ noNaN: true, min: -1e7, max: 1e7 }), fc.double({ noNaN: true, min: -1e7, max: 1e7 }),
      (one, other) => {
        const same = packed((packer) => packSense(packer, { ...SENSE_FULL, at_s: one }))
          .equals(packed((packer) => packSense(packer, { ...SENSE_FULL, at_s: other })));
        expect(same).toBe(one === other);
      }));
  });
});

describe('the digest', () => {
  it('is SHA-256 over tick by tick, vehicle in fleet order, sense then steer', () => {
    const one = startDigest();
    one.take([SENSE_BARE], [STEER_BARE]);
    expect(one.hex()).toBe(GOLDEN.digestOfOneTick);
    const two = startDigest();
    two.take([SENSE_BARE, SENSE_BARE], [STEER_BARE, STEER_BARE]);
    two.take([SENSE_FULL, SENSE_FULL], [STEER_FULL, STEER_FULL]);
    expect(two.hex()).toBe(GOLDEN.digestOfTwoTicksOfTwo);
  });

  it('of nothing is that of the empty message of FIPS 180-4', () => {
    expect(startDigest().hex()).toBe('e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855');
  });

  it('is the same whether or not it is looked at on the way, past many batches', () => {
    const looked = startDigest();
    const plain = createHash('sha256');
    for (let tick = 0; tick < 200; tick++) {
      looked.take([SENSE_FULL], [STEER_FULL]);
      plain.update(packed((packer) => packSense(packer, SENSE_FULL)));
      plain.update(packed((packer) => packSteer(packer, STEER_FULL)));
      if (tick % 37 === 0) looked.hex();
    }
    expect(looked.hex()).toBe(plain.digest('hex'));
  });

  it('changes when two vehicles change places', () => {
    const forth = startDigest();
    forth.take([SENSE_BARE, SENSE_FULL], [STEER_BARE, STEER_FULL]);
    const back = startDigest();
    back.take([SENSE_FULL, SENSE_BARE], [STEER_FULL, STEER_BARE]);
    expect(forth.hex()).not.toBe(back.hex());
  });
});
