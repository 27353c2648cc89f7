/** Lockstep over a bus within the test: no sockets, so that every order of arrival can be played. */
import { describe, expect, it, vi } from 'vitest';
import { RunFailure } from '../../../hil-sim/run/run-trial.ts';
import { lockstepAgents, type LockstepAgents } from '../../../hil-sim/shell/lockstep.ts';
import type { Sense } from '../../../messages/sense.ts';
import type { Steer } from '../../../messages/steer.ts';
import { testBus, type TestBus } from '../../support/bus.ts';
import { SENSE_BARE, STEER_BARE } from '../../support/messages.ts';

const VEHICLES = ['amber', 'cobalt', 'jade'];
const sensesAt = (tick: number): Sense[] => VEHICLES.map((_name, index) => ({ ...SENSE_BARE, tick, depth_m: index }));
const steerAt = (tick: number, change: Partial<Steer> = {}): Steer => ({ ...STEER_BARE, tick, ...change });
const topicOf = (vehicle: string): string => `drywake/b/${vehicle}/steer`;

async function lockstep(times: { askAgainMs?: number; giveUpMs?: number } = {}): Promise<{ bus: TestBus; agents: LockstepAgents }> {
  const bus = testBus();
  return { bus, agents: await lockstepAgents({ bus, bench: 'b', vehicles: VEHICLES, ...times }) };
}

describe('lockstep', () => {
  it('sends each vehicle its own sense and gives the steers in fleet order, whatever their order of arrival', async () => {
    const { bus, agents } = await lockstep();
    const answer = agents.answer(sensesAt(7));
    expect(bus.published.map(({ topic }) => topic)).toEqual(VEHICLES.map((vehicle) => `drywake/b/${vehicle}/sense`));
    expect(JSON.parse(bus.published[1]!.text)).toEqual(sensesAt(7)[1]);
    for (const [vehicle, depth] of [['jade', 3], ['amber', 1], ['cobalt', 2]] as const) {
      bus.say(topicOf(vehicle), steerAt(7, { depth_m: depth }));
    }
    expect((await answer).map((steer) => steer?.depth_m)).toEqual([1, 2, 3]);
    expect(agents.lastTick()).toBe(7);
    await agents.close();
  });

  it('refuses and counts what is foreign, garbled, of another tick, repeated or ill fitting, and waits on', async () => {
    const { bus, agents } = await lockstep();
    bus.say(topicOf('amber'), steerAt(0));
    const answer = agents.answer(sensesAt(1));
    let isDone = false;
    void Promise.resolve(answer).then(() => { isDone = true; });
    bus.say(topicOf('saffron'), steerAt(1));
    bus.say(topicOf('amber'), Uint8Array.of(1, 2, 3));
    bus.say(topicOf('amber'), { ...steerAt(1), truth: 1 });
    bus.say(topicOf('amber'), { ...steerAt(1), speed_mps: null });
    bus.say(topicOf('amber'), steerAt(0));
    bus.say(topicOf('amber'), steerAt(2));
    bus.say(topicOf('amber'), steerAt(1, { heard: ['used'] }));
    bus.say(topicOf('amber'), steerAt(1, { speed_mps: 1 }));
    bus.say(topicOf('amber'), steerAt(1, { speed_mps: 9 }));
    bus.say(topicOf('cobalt'), steerAt(1));
    await new Promise((resolve) => { setTimeout(resolve, 5); });
    expect(isDone).toBe(false);
    expect(agents.refused).toEqual({ foreign: 1, garbled: 3, 'another tick': 3, repeated: 1, 'not asked': 0, 'fates do not fit': 1 });
    bus.say(topicOf('jade'), steerAt(1));
    expect((await answer)[0]!.speed_mps).toBe(1);
    bus.say(topicOf('jade'), steerAt(1));
    expect(agents.refused.repeated).toBe(2);
    await agents.close();
  });

  it('waits for no vehicle whose agent is down, and refuses what is said in its name', async () => {
    const { bus, agents } = await lockstep();
    const [amber, , jade] = sensesAt(4);
    const answer = agents.answer([amber!, null, jade!]);
    expect(bus.published.map(({ topic }) => topic)).toEqual(['drywake/b/amber/sense', 'drywake/b/jade/sense']);
    for (const vehicle of VEHICLES) bus.say(topicOf(vehicle), steerAt(4));
    expect((await answer).map((steer) => steer?.tick)).toEqual([4, undefined, 4]);
    expect(agents.refused['not asked']).toBe(1);
    expect(await agents.answer([null, null, null])).toEqual([null, null, null]);
    await agents.close();
  });

  it('asks again for what is missing and for nothing else', async () => {
    const { bus, agents } = await lockstep({ askAgainMs: 40 });
    const answer = agents.answer(sensesAt(0));
    bus.say(topicOf('amber'), steerAt(0));
    bus.say(topicOf('jade'), steerAt(0));
    await new Promise((resolve) => { setTimeout(resolve, 100); });
    const again = bus.published.slice(3);
    expect(again.length).toBeGreaterThan(0);
    expect(again.every(({ topic, text }) => topic === 'drywake/b/cobalt/sense' && text === bus.published[1]!.text)).toBe(true);
    bus.say(topicOf('cobalt'), steerAt(0));
    await answer;
    await agents.close();
  });

  it('asks again after one second and gives up after ten', async () => {
    vi.useFakeTimers();
    try {
      const { bus, agents } = await lockstep();
      const outcome = Promise.resolve(agents.answer(sensesAt(0))).catch((error: unknown) => error);
      for (const vehicle of VEHICLES.slice(1)) bus.say(topicOf(vehicle), steerAt(0));
      await vi.advanceTimersByTimeAsync(990);
      expect(bus.published).toHaveLength(3);
      await vi.advanceTimersByTimeAsync(300);
      expect(bus.published).toHaveLength(4);
      await vi.advanceTimersByTimeAsync(8600);
      expect(bus.published.length).toBeGreaterThanOrEqual(10);
      let isSettled = false;
      void outcome.then(() => { isSettled = true; });
      await vi.advanceTimersByTimeAsync(50);
      expect(isSettled).toBe(false);
      await vi.advanceTimersByTimeAsync(400);
      expect(await outcome).toMatchObject({ vehicle: 'amber', tick: 0, reason: 'no steer from amber for 10 s' });
      await agents.close();
    } finally {
      vi.useRealTimers();
    }
  });

  it('gives up with the vehicle and the tick, and stays given up', async () => {
    const { bus, agents } = await lockstep({ askAgainMs: 20, giveUpMs: 60 });
    const first = agents.answer(sensesAt(0));
    for (const vehicle of VEHICLES) bus.say(topicOf(vehicle), steerAt(0));
    await first;
    const answer = Promise.resolve(agents.answer(sensesAt(1)));
    bus.say(topicOf('cobalt'), steerAt(1));
    const failure = await answer.catch((error: unknown) => error);
    expect(failure).toBeInstanceOf(RunFailure);
    expect(failure).toMatchObject({ vehicle: 'amber', tick: 1, reason: 'no steer from amber (nor from jade) for 0.06 s' });
    const later = await Promise.resolve(agents.answer(sensesAt(2))).catch((error: unknown) => error);
    expect(later).toMatchObject({ vehicle: 'amber', tick: 2 });
    await agents.close();
  });

  it('fails the tick that is being waited for at once, or the next one, with the first reason', async () => {
    const { agents } = await lockstep();
    const answer = Promise.resolve(agents.answer(sensesAt(5)));
    agents.fail('the agent of jade ended', 'jade');
    agents.fail('something later', 'amber');
    expect(await answer.catch((error: unknown) => error)).toMatchObject({ vehicle: 'jade', tick: 5 });
    expect(await Promise.resolve(agents.answer(sensesAt(6))).catch((error: unknown) => error))
      .toMatchObject({ reason: 'the agent of jade ended', tick: 6 });
    await agents.close();
  });

  it('stops at a sense with a number that JSON cannot say', async () => {
    const { agents } = await lockstep();
    await expect(async () => agents.answer([{ ...SENSE_BARE, depth_m: NaN }])).rejects.toThrow('finite');
    await agents.close();
  });
});
