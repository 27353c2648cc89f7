/** What must hold of any run, each a watcher that answers with sentences about what did not. */
import { steerSchema } from '../../messages/steer.ts';
import type { TickRecord } from '../../hil-sim/run/record.ts';
import type { Watcher } from '../../hil-sim/run/run-trial.ts';
import type { Trial } from '../../hil-sim/trial/schema.ts';

export interface Checker extends Watcher {
  readonly name: string;
  findings(): string[];
}

const FINDINGS_MAX = 5;

function checker(name: string, take: (record: TickRecord, find: (text: string) => void) => void, end?: (find: (text: string) => void) => void): Checker {
  const found: string[] = [];
  const find = (text: string): void => { if (found.length < FINDINGS_MAX) found.push(text); };
  return {
    name,
    take: (record) => { take(record, find); },
    findings() {
      end?.(find);
      return found;
    },
  };
}

/** Every steer fits its schema, so every state has a reason and every number its range. */
export function fitsTheContract(): Checker {
  return checker('every steer fits the contract', ({ tick, steers }, find) => {
    if (tick % 7 !== 0) return;
    steers.forEach((steer, index) => {
      if (steer === null) return;
      const parsed = steerSchema.safeParse(steer);
      if (!parsed.success) find(`tick ${tick}, vehicle ${index}: ${parsed.error.issues[0]?.path.join('.')} ${parsed.error.issues[0]?.message}`);
    });
  });
}

/** Vehicles within 5 m of depth keep apart. */
export function keepsApart(leastM: number): Checker {
  return checker(`vehicles at one depth keep ${leastM} m apart`, ({ timeS, truth }, find) => {
    const { eastM, northM, depthM } = truth;
    for (let one = 0; one < eastM.length; one++) {
      for (let other = one + 1; other < eastM.length; other++) {
        if (Math.abs(depthM[one]! - depthM[other]!) > 5) continue;
        const apartM = Math.sqrt((eastM[one]! - eastM[other]!) ** 2 + (northM[one]! - northM[other]!) ** 2);
        if (!(apartM >= leastM)) find(`at ${timeS} s vehicles ${one} and ${other} are ${apartM.toFixed(1)} m apart`);
      }
    }
  });
}

/** Nobody leaves the area for good. */
export function staysInside(trial: Trial): Checker {
  const { keepIn } = trial.mission;
  return checker('nobody is out of keepIn', ({ timeS, truth }, find) => {
    truth.eastM.forEach((east, index) => {
      const north = truth.northM[index]!;
      const outM = Math.sqrt((east - keepIn.centre.east) ** 2 + (north - keepIn.centre.north) ** 2);
      if (!(outM <= keepIn.radius)) find(`at ${timeS} s vehicle ${index} is ${outM.toFixed(0)} m from the centre`);
    });
  });
}

/** What the link did to frames is what the agents say they refused: to the last one. */
export function countsAddUp(): Checker {
  const fates = new Map<string, number>();
  const said = new Map<string, number>();
  const add = (map: Map<string, number>, key: string): void => { map.set(key, (map.get(key) ?? 0) + 1); };
  return checker('frames add up', ({ steers, hearings }) => {
    for (const { fate } of hearings) add(fates, fate);
    for (const steer of steers) for (const fate of steer?.heard ?? []) add(said, fate);
  }, (find) => {
    const garbled = fates.get('garbled') ?? 0;
    // The last tick's frames are judged after it: a few may stand on one side only.
    if (Math.abs((said.get('check') ?? 0) - garbled) > 8) find(`${garbled} garbled, but ${said.get('check') ?? 0} refused by their check`);
    const refused = (fates.get('refused') ?? 0) + garbled;
    const saidRefused = [...said].filter(([fate]) => fate !== 'used').reduce((sum, [, count]) => sum + count, 0);
    if (Math.abs(refused - saidRefused) > 8) find(`${refused} refused or garbled, but ${saidRefused} said to be refused`);
    for (const reason of ['length', 'version', 'content', 'sender', 'own', 'time']) {
      if (said.has(reason)) find(`${said.get(reason)} frames refused for ${reason}, which nobody injected`);
    }
  });
}

/** After the calm everybody holds the same notes, and the maps agree. */
export function agreesInTheEnd(): Checker {
  let held: number[] = [];
  let maps: { east: readonly number[]; north: readonly number[] }[] = [];
  return checker('maps agree after the calm', ({ steers }) => {
    if (steers.some((steer) => steer === null || steer.map === null)) return;
    held = steers.map((steer) => steer!.estimate.notesHeld);
    maps = steers.map((steer) => ({ east: steer!.map!.east_mps, north: steer!.map!.north_mps }));
  }, (find) => {
    // A note takes a round or three to get about: those of the last minutes may be on their way.
    if (Math.max(...held) - Math.min(...held) > held.length + 1) find(`notes held: ${held.join(', ')}`);
    let square = 0;
    let count = 0;
    for (let point = 0; point < (maps[0]?.east.length ?? 0); point++) {
      for (const of of ['east', 'north'] as const) {
        const values = maps.map((map) => map[of][point]!);
        const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
        for (const value of values) square += (value - mean) ** 2;
        count += values.length;
      }
    }
    const spread = Math.sqrt((2 * square) / Math.max(1, count));
    if (!(spread <= 0.01)) find(`the maps differ by ${spread.toFixed(4)} m/s`);
  });
}

/** After the calm everybody holds, on the loop, in even gaps. */
export function isFormedUpInTheEnd(trial: Trial): Checker {
  const { loop } = trial.mission;
  let last: { states: string[]; offM: number[]; gaps: number[] } = { states: [], offM: [], gaps: [] };
  return checker('the fleet is formed up after the calm', ({ truth, steers }) => {
    const offM = Array.from(truth.eastM, (east, index) => Math.abs(Math.sqrt(
      (east - loop.centre.east) ** 2 + (truth.northM[index]! - loop.centre.north) ** 2) - loop.radius));
    const phases = Array.from(truth.eastM, (east, index) =>
      Math.atan2(east - loop.centre.east, truth.northM[index]! - loop.centre.north) / (2 * Math.PI) + 1).map((turn) => turn % 1)
      .sort((a, b) => a - b);
    const gaps = phases.map((phase, index) => ((phases[(index + 1) % phases.length]! - phase + 1) % 1) * phases.length);
    last = { states: steers.map((steer) => steer?.state ?? 'down'), offM, gaps };
  }, (find) => {
    if (last.states.some((state) => state !== 'holding')) find(`states are ${last.states.join(', ')}`);
    if (!(Math.max(...last.offM) <= 30)) find(`cross-track is ${last.offM.map((off) => off.toFixed(0)).join(', ')} m`);
    if (last.gaps.length > 1 && !(Math.max(...last.gaps.map((gap) => Math.abs(gap - 1))) <= 0.3)) {
      find(`gaps over target are ${last.gaps.map((gap) => gap.toFixed(2)).join(', ')}`);
    }
  });
}
