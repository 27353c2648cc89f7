import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { MESSAGE_BYTES_MAX, readMessage, writeMessage } from '../../messages/codec.ts';
import { missionSchema } from '../../messages/mission.ts';
import { normalise } from '../../messages/normalise.ts';
import { seaTickSchema } from '../../messages/sea.ts';
import { senseSchema } from '../../messages/sense.ts';
import { statusSchema } from '../../messages/status.ts';
import { steerSchema } from '../../messages/steer.ts';
import { SENSE_BARE, SENSE_FULL, STEER_BARE, STEER_FULL } from '../support/messages.ts';
import { missionFor } from '../support/mission.ts';

const READERS = [missionSchema, senseSchema, steerSchema, statusSchema, seaTickSchema]
  .map((schema) => (bytes: Uint8Array) => readMessage<unknown>(schema, bytes));
const bytesOf = (text: string): Uint8Array => new TextEncoder().encode(text);
const senseText = (change: Record<string, unknown>): Uint8Array => bytesOf(JSON.stringify({ ...SENSE_BARE, ...change }));

describe('reading a message', () => {
  it('gives back what was written', () => {
    expect(readMessage(senseSchema, writeMessage(SENSE_FULL))).toEqual({ ok: true, value: SENSE_FULL });
    expect(readMessage(senseSchema, writeMessage(SENSE_BARE))).toEqual({ ok: true, value: SENSE_BARE });
    expect(readMessage(steerSchema, writeMessage(STEER_FULL))).toEqual({ ok: true, value: STEER_FULL });
    expect(readMessage(steerSchema, writeMessage(STEER_BARE))).toEqual({ ok: true, value: STEER_BARE });
    const mission = missionFor(1);
    expect(readMessage(missionSchema, writeMessage(mission))).toEqual({ ok: true, value: mission });
  });

  it.each<[string, Uint8Array, string]>([
    ['nothing', new Uint8Array(0), 'is empty'],
    ['too much', new Uint8Array(MESSAGE_BYTES_MAX + 1).fill(0x20), 'at most'],
    ['no UTF-8', Uint8Array.of(0x22, 0xff, 0x22), 'is not JSON in UTF-8'],
    ['half a message', writeMessage(SENSE_FULL).subarray(0, 90), 'is not JSON in UTF-8'],
    ['two messages', bytesOf('{}{}'), 'is not JSON in UTF-8'],
    ['deep nesting', bytesOf('['.repeat(200_000)), 'is not JSON in UTF-8'],
    ['another kind of value', bytesOf('null'), 'message'],
    ['an unknown key', senseText({ truth: 1 }), 'truth'],
    ['a key of prototypes', bytesOf(JSON.stringify(SENSE_BARE).replace('{', '{"__proto__":{"tick":1},')), '__proto__'],
    ['a missing key', senseText({ battery: undefined }), 'battery'],
    ['a word for a number', senseText({ depth_m: 'deep' }), 'depth_m'],
    ['an infinite number', bytesOf(JSON.stringify(SENSE_BARE).replace('"depth_m":0', '"depth_m":1e999')), 'depth_m'],
    ['half a tick', senseText({ tick: 0.5 }), 'tick'],
    ['a tick before the first', senseText({ tick: -1 }), 'tick'],
    ['a heading of a whole turn', senseText({ heading_deg: 360 }), 'heading_deg'],
    ['a frame in capitals', senseText({ heard: [{ at_s: 0, bytes: 'AB' }] }), 'heard.0.bytes'],
    ['half a byte', senseText({ heard: [{ at_s: 0, bytes: 'abc' }] }), 'heard.0.bytes'],
    ['an order that is none', senseText({ orders: ['dive'] }), 'orders.0'],
    ['too many frames', senseText({ heard: new Array(65).fill({ at_s: 0, bytes: 'ab' }) }), 'heard'],
  ])('refuses %s and says why', (_what, bytes, reason) => {
    const reading = readMessage(senseSchema, bytes);
    expect(reading.ok).toBe(false);
    if (!reading.ok) expect(reading.reason).toContain(reason);
  });

  it('never throws, for any bytes and any schema', () => {
    const text = fc.oneof(fc.json(), fc.string()).map(bytesOf);
    fc.assert(fc.property(fc.oneof(fc.uint8Array({ maxLength: 300 }), text), (bytes) => {
      for (const read of READERS) expect(typeof read(bytes).ok).toBe('boolean');
    }), { numRuns: 500 });
  });

  it('never lets a message through that one flipped byte has made another kind of thing', () => {
    const good = writeMessage(SENSE_FULL);
    fc.assert(fc.property(fc.nat(good.length - 1), fc.integer({ min: 1, max: 255 }), (at, flip) => {
      const bytes = good.slice();
      bytes[at] = bytes[at]! ^ flip;
      const reading = readMessage(senseSchema, bytes);
      if (reading.ok) expect(senseSchema.safeParse(reading.value).success).toBe(true);
    }), { numRuns: 1000 });
  });

  it('answers with a reason that a status can carry, however long the keys', () => {
    const reading = readMessage(senseSchema, senseText({ ['k'.repeat(100_000)]: 1 }));
    expect(reading.ok).toBe(false);
    if (!reading.ok) expect(reading.reason.length).toBeLessThanOrEqual(500);
  });
});

describe('the two roads of a message', () => {
  it('give the same: the normaliser and JSON', () => {
    const number = fc.double({ noNaN: true, noDefaultInfinity: true });
    fc.assert(fc.property(number, number, fc.array(number, { maxLength: 3 }), (one, other, list) => {
      const message = (): unknown => ({ one, nested: { other, list, text: 'a', none: null, yes: true } });
      const wire: unknown = JSON.parse(Buffer.from(writeMessage(message())).toString());
      expect(normalise(message())).toStrictEqual(wire);
    }));
  });

  it('both turn minus zero into zero', () => {
    const message = normalise({ ...SENSE_BARE, at_s: -0, fix: { at_s: -0, east_m: -0, north_m: 1, sigma_m: 1 } });
    expect(Object.is(message.at_s, 0)).toBe(true);
    expect(Object.is(message.fix.east_m, 0)).toBe(true);
    expect(Object.is(normalise([-0])[0], 0)).toBe(true);
  });

  it.each([NaN, Infinity, -Infinity])('stop at %d, which JSON would turn into null', (value) => {
    expect(() => normalise({ deep: [{ value }] })).toThrow('finite');
  });
});
