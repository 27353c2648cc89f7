import { describe, expect, it } from 'vitest';
import { inProcessAgents } from '../../../hil-sim/run/in-process.ts';
import type { TickRecord } from '../../../hil-sim/run/record.ts';
import type { Agents } from '../../../hil-sim/run/run-trial.ts';
import { readMessage, writeMessage } from '../../../messages/codec.ts';
import { missionSchema } from '../../../messages/mission.ts';
import { senseSchema, type Sense } from '../../../messages/sense.ts';
import { steerSchema, type Steer } from '../../../messages/steer.ts';
import { MARROW_BANK, SMOKE, missionsFor, runOf, trialFrom } from '../../support/runs.ts';

const TICKS = 400;

function read<T>(schema: Parameters<typeof readMessage<T>>[0], message: unknown): T {
  const reading = readMessage(schema, writeMessage(message));
  if (!reading.ok) throw new Error(reading.reason);
  return reading.value;
}

/** The same agents behind the wire's codec: missions, senses and steers as bytes, checked by their schemas. */
function jsonAgents(agentsOf: (missions: ReturnType<typeof missionsFor>) => Agents, trial: ReturnType<typeof trialFrom>): Agents {
  const inner = agentsOf(missionsFor(trial).map((mission) => read(missionSchema, mission)));
  return {
    answer: (senses) => {
      const steers = inner.answer(senses.map((sense) => sense && read<Sense>(senseSchema, sense)));
      return (steers as readonly (Steer | null)[]).map((steer) => steer && read<Steer>(steerSchema, steer));
    },
    restart: (index, phase, memory) => inner.restart(index, phase, memory),
    close: () => undefined,
  };
}

describe('a run in process', () => {
  it.each([
    ['smoke', 1, SMOKE], ['smoke', 2, SMOKE], ['five', 41, MARROW_BANK],
  ])('has the same messages and digest by the road of JSON: %s, seed %i', async (_name, seed, path) => {
    const trial = trialFrom(path, { seed });
    const messages = (kept: string[]) => ({
      take: ({ senses, steers }: TickRecord) => { kept.push(JSON.stringify([senses, steers])); },
    });
    const direct: string[] = [];
    const wire: string[] = [];
    const one = await runOf({ trial, ticks: TICKS, agents: inProcessAgents(missionsFor(trial)), watchers: [messages(direct)] });
    const other = await runOf({ trial, ticks: TICKS, agents: jsonAgents(inProcessAgents, trial), watchers: [messages(wire)] });
    expect(one).toMatchObject({ ok: true, ticks: TICKS });
    expect(wire).toEqual(direct);
    expect(direct.length).toBe(TICKS);
    expect(other.ok && one.ok && other.digest === one.digest).toBe(true);
  });

  it('has another digest with another seed, and the same with the same', async () => {
    const digestOf = async (seed: number): Promise<string> => {
      const trial = trialFrom(SMOKE, { seed });
      const result = await runOf({ trial, ticks: 50, agents: inProcessAgents(missionsFor(trial)) });
      return result.ok ? result.digest : result.reason;
    };
    expect(await digestOf(3)).toBe(await digestOf(3));
    expect(await digestOf(3)).not.toBe(await digestOf(4));
  });

  it('shows every tick to every watcher, in order, and stops at the last', async () => {
    const trial = trialFrom(SMOKE);
    const seen: number[] = [];
    const watcher = { take: ({ tick, timeS }: TickRecord) => { seen.push(tick, timeS); } };
    await runOf({ trial, ticks: 5, agents: inProcessAgents(missionsFor(trial)), watchers: [watcher] });
    expect(seen).toEqual([0, 0, 1, 1, 2, 2, 3, 3, 4, 4]);
  });

  it('ends as a failure that names the tick when a watcher or an agent breaks', async () => {
    const trial = trialFrom(SMOKE);
    const watcher = { take: ({ tick }: TickRecord) => { if (tick === 3) throw new Error('the disk is full'); } };
    const result = await runOf({ trial, ticks: 9, agents: inProcessAgents(missionsFor(trial)), watchers: [watcher] });
    expect(result).toMatchObject({ ok: false, tick: 3, vehicle: null });
    expect(!result.ok && result.reason).toContain('the disk is full');
  });

  it('stops at a signal', async () => {
    const trial = trialFrom(SMOKE);
    const stop = new AbortController();
    stop.abort();
    const result = await runOf({ trial, ticks: 100_000, agents: inProcessAgents(missionsFor(trial)), signal: stop.signal });
    expect(result).toMatchObject({ ok: false, reason: 'stopped by a signal' });
  });
});
