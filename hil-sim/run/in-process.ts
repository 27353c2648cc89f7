/** The same two cores without sockets: the only place where the bench touches an agent's code. */
import { deserialize, serialize } from 'node:v8';
import { CHECKPOINT_S } from '../../messages/memory.ts';
import type { Aid, AidedSense } from '../../messages/aid.ts';
import type { Note } from '../../messages/frame.ts';
import type { Mission } from '../../messages/mission.ts';
import { normalise } from '../../messages/normalise.ts';
import type { Sense } from '../../messages/sense.ts';
import { MAP_POINTS, type Steer } from '../../messages/steer.ts';
import { start, type State } from '../../onboard/core/state.ts';
import { step } from '../../onboard/core/step.ts';
import type { Sea } from '../sea/sea.ts';
import type { Agents } from './run-trial.ts';

interface SyncAgents extends Agents {
  answer(senses: readonly (Sense | AidedSense | null)[]): readonly (Steer | null)[];
}

/** Agents that answer at once, one per mission, in fleet order; `keepsMemory` if a reboot may need it. */
export function inProcessAgents(missions: readonly Mission[], keepsMemory = false): Agents {
  return startAgents(missions, keepsMemory).agents;
}

function startAgents(
  missions: readonly Mission[],
  keepsMemory = false,
): {
  agents: SyncAgents;
  states: readonly (State | null)[];
} {
  const states: (State | null)[] = missions.map((mission) => start(mission));
  const kept = new Array<Buffer | null>(missions.length).fill(null);
  const agents: SyncAgents = {
    answer: (senses) =>
      senses.map((sense, index) => {
        const state = states[index];
        if (sense === null || state === null || state === undefined) return null;
        const steer = normalise(step(state, normalise(sense)));
        if (keepsMemory && (sense.tick * state.mission.tick_s) % CHECKPOINT_S === 0)
          kept[index] = serialize(state);
        return steer;
      }),
    restart(index, phase, memory) {
      const saved = kept[index] ?? null;
      if (phase === 'down') states[index] = null;
      else
        states[index] =
          memory === 'kept' && saved !== null ? (deserialize(saved) as State) : start(missions[index]!);
    },
    close: () => undefined,
  };
  return { agents, states };
}

export type Yardstick = 'central' | 'known';

/** Prior sigmas of a current that is given: nothing is left to estimate but the vehicle's own sensors. */
const GIVEN_SIGMA_MPS = 1e-7;

/** Agents of a yardstick run: each sense carries an `aid` that no other run has. */
export function yardstickAgents(missions: readonly Mission[], sea: Sea, kind: Yardstick): Agents {
  const { agents, states } = startAgents(kind === 'known' ? missions.map(withGivenCurrent) : missions);
  const points = missions[0] === undefined ? [] : loopPoints(missions[0]);
  const made: Note[] = [];
  return {
    ...agents,
    answer(senses) {
      const notes = made.splice(0);
      const steers = agents.answer(
        senses.map((sense, index) =>
          sense === null
            ? null
            : {
                ...sense,
                aid: kind === 'central' ? { kind, notes } : knownAid(sea, index, points),
              },
        ),
      );
      for (const state of states) {
        const note = state?.counts.issued ?? null;
        if (note !== null) made.push(note);
      }
      return steers;
    },
  };
}

function withGivenCurrent(mission: Mission): Mission {
  const none = {
    uniformSigma_mps: GIVEN_SIGMA_MPS,
    tideSigma_mps: GIVEN_SIGMA_MPS,
    mapSigma_mps: GIVEN_SIGMA_MPS,
  };
  return { ...mission, sharing: 'solo', onboard: { ...mission.onboard, ...none } };
}

/** Places at phases 0/64 … 63/64, by the bench's own geometry. */
function loopPoints(mission: Mission): { eastM: number; northM: number }[] {
  const { centre, radius_m: radiusM, turn } = mission.loop;
  const sense = turn === 'clockwise' ? 1 : -1;
  return Array.from({ length: MAP_POINTS }, (_, point) => {
    const bearingRad = (sense * 2 * Math.PI * point) / MAP_POINTS;
    return {
      eastM: centre.east_m + radiusM * Math.sin(bearingRad),
      northM: centre.north_m + radiusM * Math.cos(bearingRad),
    };
  });
}

function knownAid(sea: Sea, index: number, points: readonly { eastM: number; northM: number }[]): Aid {
  const { truth, tick, tickS } = sea;
  const here = { east_mps: truth.currentEastMps[index]!, north_mps: truth.currentNorthMps[index]! };
  if ((tick * tickS) % 60 !== 0) return { kind: 'known', ...here, loop: null };
  const current = new Float64Array(2);
  const loop = { east_mps: [] as number[], north_mps: [] as number[] };
  for (const { eastM, northM } of points) {
    sea.currentAt(eastM, northM, tick * tickS, current);
    loop.east_mps.push(current[0]!);
    loop.north_mps.push(current[1]!);
  }
  return { kind: 'known', ...here, loop };
}
