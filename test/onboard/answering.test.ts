/** What an agent makes of bytes, without a socket. */
import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { writeMessage } from '../../messages/codec.ts';
import { statusSchema } from '../../messages/status.ts';
import {
  isRunOver, startAnswering, statusOf, takeMission, takeSense, type Answering,
} from '../../onboard/answering.ts';
import { SENSE_BARE } from '../support/messages.ts';
import { missionFor } from '../support/mission.ts';

const sense = (tick: number, change = {}): Uint8Array =>
  writeMessage({ ...SENSE_BARE, tick, at_s: tick, heading_deg: 40, speed_mps: 1.2, ...change });
const text = (bytes: Uint8Array | null): string => (bytes === null ? 'refused' : Buffer.from(bytes).toString());

function started(): Answering {
  const answering = startAnswering('cobalt');
  expect(takeMission(answering, writeMessage(missionFor(1)))).toBe(true);
  return answering;
}

describe('an agent\'s answers', () => {
  it('come one per sense, for its tick', () => {
    const answering = started();
    for (let tick = 0; tick < 5; tick++) expect(JSON.parse(text(takeSense(answering, sense(tick))))).toMatchObject({ tick });
    expect(answering.refused).toBe(0);
  });

  it('are the same bytes when asked again, and leave what follows unchanged', () => {
    const once = started();
    const twice = started();
    for (let tick = 0; tick < 70; tick++) {
      const first = text(takeSense(once, sense(tick)));
      expect(text(takeSense(twice, sense(tick)))).toBe(first);
      expect(text(takeSense(twice, sense(tick, { depth_m: 99 })))).toBe(first);
    }
    expect(twice.refused).toBe(0);
  });

  it('are not given to a sense out of order, which changes nothing', () => {
    const disturbed = started();
    const calm = started();
    for (let tick = 0; tick < 20; tick++) {
      expect(text(takeSense(disturbed, sense(tick)))).toBe(text(takeSense(calm, sense(tick))));
      for (const other of [tick - 1, tick + 2, tick + 1000]) {
        if (other >= 0) expect(takeSense(disturbed, sense(other))).toBeNull();
      }
    }
    expect(disturbed.refused).toBe(59);
  });

  it('begin at any tick, since an agent can be started on the way', () => {
    const answering = started();
    expect(JSON.parse(text(takeSense(answering, sense(900))))).toMatchObject({ tick: 900 });
    expect(takeSense(answering, sense(0))).toBeNull();
  });

  it('are not given without a mission', () => {
    const answering = startAnswering('cobalt');
    expect(takeSense(answering, sense(0))).toBeNull();
    expect(statusOf(answering)).toMatchObject({ refused: 1, tick: -1 });
  });

  it('are not given to any garbled bytes; each is counted and none reaches the core', () => {
    const disturbed = started();
    const calm = started();
    let tick = 0;
    let garbled = 0;
    fc.assert(fc.property(fc.oneof(fc.uint8Array({ maxLength: 99 }), fc.json().map((json) => Buffer.from(json))), (bytes) => {
      expect(takeSense(disturbed, bytes)).toBeNull();
      garbled += 1;
      expect(disturbed.refused).toBe(garbled);
      expect(text(takeSense(disturbed, sense(tick)))).toBe(text(takeSense(calm, sense(tick))));
      tick += 1;
    }));
  });
});

describe('an agent\'s mission', () => {
  it('is refused if it is another vehicle\'s, of a fleet without it, or garbled', () => {
    const answering = startAnswering('cobalt');
    expect(takeMission(answering, writeMessage(missionFor(2)))).toBe(false);
    expect(takeMission(answering, writeMessage({ ...missionFor(1), fleet: [{ name: 'amber', slot: 0 }] }))).toBe(false);
    expect(takeMission(answering, Buffer.from('{}'))).toBe(false);
    expect(answering).toMatchObject({ refused: 3, mission: null });
  });

  it('may be replaced until the first sense, and not after it', () => {
    const answering = started();
    const deeper = writeMessage(missionFor(1, 5, { depth_m: 55 }));
    const fresh = startAnswering('cobalt');
    expect(takeMission(answering, deeper) && takeMission(fresh, deeper)).toBe(true);
    const steer = text(takeSense(answering, sense(0)));
    expect(steer).toBe(text(takeSense(fresh, sense(0))));
    expect(steer).not.toBe(text(takeSense(started(), sense(0))));
    expect(takeMission(answering, writeMessage(missionFor(1)))).toBe(false);
    expect(answering).toMatchObject({ refused: 1, lastTick: 0 });
    expect(answering.mission?.depth_m).toBe(55);
  });

  it('said again, or cleared, is not a refusal', () => {
    const answering = started();
    expect(takeMission(answering, writeMessage(missionFor(1)))).toBe(false);
    expect(takeMission(answering, new Uint8Array(0))).toBe(false);
    expect(answering.refused).toBe(0);
  });
});

describe('the end of the run', () => {
  it.each([['running', false], ['ended', true], ['failed', true], ['paused', false]])('phase %s: %s', (phase, over) => {
    expect(isRunOver(started(), writeMessage({ tick: 3, time_s: 3, phase }))).toBe(over);
  });
});

describe('an agent\'s status', () => {
  it('fits its schema from the start to the end, whatever the reason', () => {
    const answering = startAnswering('cobalt');
    expect(statusSchema.parse(statusOf(answering, 'gone'))).toMatchObject({ phase: 'gone', state: null, tick: -1 });
    takeMission(answering, writeMessage(missionFor(1)));
    expect(statusSchema.parse(statusOf(answering)).phase).toBe('ready');
    takeSense(answering, sense(0));
    expect(statusSchema.parse(statusOf(answering))).toMatchObject({ phase: 'running', tick: 0 });
    expect(statusSchema.parse(statusOf(answering, 'failed', 'x'.repeat(2000))).reason).toHaveLength(500);
  });
});
