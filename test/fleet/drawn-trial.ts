/**
 * A trial drawn from a seed: whole features off in some, extreme in others. First an hour in which
 * faults rage, then calm until the end: nothing may go wrong in the one, all must be well after the other.
 */
import type { Trial } from '../../hil-sim/trial/schema.ts';
import { randomFrom } from '../support/estimating.ts';
import { MARROW_BANK, trialFrom } from '../support/runs.ts';

const NAMES = ['amber', 'cobalt', 'jade', 'ochre', 'umber', 'indigo', 'slate', 'coral'];
/** Faults are over by here. */
export const CALM_FROM_S = 4500;
export const DURATION_S = 9000;

export interface Drawn {
  readonly trial: Trial;
  /** What was drawn, in words. */
  readonly words: string;
}

export function drawTrial(seed: number): Drawn {
  const random = randomFrom(seed);
  const pick = <T>(values: readonly T[]): T => values[Math.floor(random() * values.length)]!;
  const within = (least: number, most: number): string => (least + (most - least) * random()).toFixed(3);
  const degrees = (): string => `${Math.floor(360 * random())} deg`;
  const size = pick([2, 3, 5, 5, 8]);
  const radius = pick([400, 600, 900]);
  const names = NAMES.slice(0, size);
  const vehicles = names.map((name, index) =>
    `{ name: ${name}, start: { east: ${-radius - 300 - 30 * index} m, north: ${150 - 90 * index} m, heading: ${degrees()} } }`);
  const currents = [
    ...(random() < 0.8 ? [`{ kind: uniform, set: ${degrees()}, drift: ${within(0.02, 0.2)} m/s }`] : []),
    ...(random() < 0.7 ? [`{ kind: tide, period: 12.4206 h, major: ${within(0.05, 0.3)} m/s, minor: ${within(-0.05, 0.05)} m/s, bearing: ${degrees()}, phase: ${degrees()} }`] : []),
    ...(random() < 0.5 ? [`{ kind: eddy, centre: { east: ${within(-400, 400)} m, north: ${within(-400, 400)} m }, radius: 500 m, peak: ${within(0.05, 0.2)} m/s, turn: ${pick(['clockwise', 'anticlockwise'])} }`] : []),
  ];
  const link = [
    `loss: ${pick([0, 0, 20, 60, 80])} %`, `burst: ${pick([1, 1, 4])}`, `repeat: ${pick([0, 0, 10])} %`, `garble: ${pick([0, 0, 5, 30])} %`,
    `delay: ${pick([0, 0, 3])} s`, `jitter: ${pick([0, 0, 2])} s`,
  ];
  const at = (spanS: number): string => `at: ${Math.floor(1200 + (CALM_FROM_S - 1200 - spanS) * random())} s, for: ${spanS} s`;
  const someone = (): string => pick(names);
  const kinds = [
    () => `{ ${at(1200)}, kind: link, loss: ${pick([80, 100])} %, from: ${someone()} }`,
    () => `{ ${at(600)}, kind: link, garble: 100 % }`,
    () => `{ ${at(1800)}, kind: compass, vehicle: ${someone()}, step: ${within(-6, 6)} deg }`,
    () => `{ ${at(1800)}, kind: log, vehicle: ${someone()}, step: ${within(-4, 4)} % }`,
    () => `{ ${at(1800)}, kind: fix, vehicle: ${someone()}, outage: true }`,
    () => `{ ${at(900)}, kind: fix, outliers: 20 %, outlierSigma: 80 m }`,
    () => `{ ${at(90)}, kind: reboot, vehicle: ${someone()}, memory: ${pick(['lost', 'kept'])} }`,
    () => `{ ${at(900)}, kind: current, set: ${degrees()}, drift: ${within(0.02, 0.1)} m/s }`,
  ];
  const faults = Array.from({ length: Math.floor(5 * random()) }, () => pick(kinds)());
  const sets = [
    `title=drawn ${seed}`, `duration=${DURATION_S} s`,
    `mission.loop={ shape: circle, centre: { east: 0 m, north: 0 m }, radius: ${radius} m, turn: ${pick(['clockwise', 'anticlockwise'])} }`,
    'mission.keepIn.radius=2000 m', `fleet.vehicles=[${vehicles.join(', ')}]`, `water.currents=[${currents.join(', ')}]`,
    `modem.link={ ${link.join(', ')} }`, `faults=[${faults.join(', ')}]`, 'orders=[]', 'limits={}',
  ];
  // The script's faults end before the calm; the channel's own upsets end with it too.
  const calm = `faults.+={ at: ${CALM_FROM_S} s, kind: link, loss: 10 %, burst: 1, delay: 0 s, jitter: 0 s, repeat: 0 %, garble: 0 % }`;
  return { trial: trialFrom(MARROW_BANK, { seed, sets: [...sets, calm] }), words: `${size} vehicles, ${radius} m, ${link.join(', ')}; ${faults.join('; ')}` };
}
