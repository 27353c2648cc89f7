/** What the design names and is not built yet is told so, by name, and nothing else is said of it. */
import { afterAll, describe, expect, it } from 'vitest';
import { GOOD, TrialFolder, after, changed } from '../../support/trial-text.ts';

const folder = new TrialFolder();
afterAll(() => folder.remove());

const LOOP = 'shape: circle, centre: { east: 0 m, north: 0 m }, radius: 300 m';
const CENTRE = 'centre: { east: 0 m, north: 0 m }';
const mission = (line: string): string => changed('  recovery', `  ${line}\n  recovery`);
const fault = (keys: string): string => after(`faults: [{ at: 1 min, ${keys} }]`);

/** Each written out with the keys that the design gives it. */
const LATER: [string, string, string][] = [
  ['an ellipse', changed(LOOP, `shape: ellipse, ${CENTRE}, semiMajor: 900 m, semiMinor: 500 m, bearing: 30 deg`),
    'mission.loop.shape: is ellipse, which is not built yet'],
  ['a racetrack', changed(LOOP, `shape: racetrack, ${CENTRE}, leg: 1200 m, radius: 300 m, bearing: 75 deg`),
    'mission.loop.shape: is racetrack, which is not built yet'],
  ['an outline', changed(LOOP, 'shape: outline, points: [{ lat: 58, lon: -9 }], cornerRadius: 80 m'),
    'mission.loop.shape: is outline, which is not built yet'],
  ['a racetrack to keep out of', mission(`keepOut: [{ shape: racetrack, ${CENTRE}, leg: 9 m, radius: 9 m }]`),
    'mission.keepOut.0.shape: is racetrack, which is not built yet'],
  ['a moving loop', changed(LOOP, `${LOOP}, moving: { set: 40 deg, drift: 0.05 m/s }`),
    'mission.loop.moving: is not built yet'],
  ['a moving mission', mission('moving: { set: 40 deg, drift: 0.05 m/s }'), 'mission.moving: is not built yet'],
  ['a loop that follows', mission('follow: eddy'), 'mission.follow: is not built yet'],
  ['several loops', changed(/ {2}loop: .*\n/, '  loops: { inner: { shape: circle, vehicles: [amber] } }\n'),
    'mission.loops: is not built yet'],
  ['spacing by time', mission('spacing: time'), 'mission.spacing: is time, which is not built yet'],
  ['consensus', mission('sharing: consensus'), 'mission.sharing: is consensus, which is not built yet'],
  ['intersection', mission('sharing: intersection'), 'mission.sharing: is intersection, which is not built yet'],
  ['a forecast', changed('water: {}', 'water: { currents: [{ kind: forecast, file: forecast.nc }] }'),
    'water.currents.0.kind: is forecast, which is not built yet'],
  ['physics', after('modem: { physics: on }'), 'modem.physics: is on, which is not built yet'],
  ['a limit on frames', after('limits: { framesSent: 100 }'), 'limits.framesSent: is not built yet'],
  ...[
    'kind: deaf, vehicle: amber', 'kind: blackout, shape: circle', 'kind: noise, rise: 10 dB',
    'kind: collisions, rate: 1 /min', 'kind: forged, rate: 1 /min, as: amber',
    'kind: replayed, rate: 1 /min, of: amber, age: 9 s', 'kind: thruster, derate: 30 %',
    'kind: rudder, stuck: 3 deg/s', 'kind: battery, sag: 20 %', 'kind: clock, step: 0.5 s',
    'kind: broker, cut: true', 'kind: network, delay: 1 s, loss: 1 %', 'kind: agent, pause: true',
  ].map((keys): [string, string, string] => {
    const kind = /kind: (\w+)/.exec(keys)![1]!;
    return [`the fault ${kind}`, fault(keys), `faults.0.kind: is ${kind}, which is not built yet`];
  }),
];

describe('what is not built yet', () => {
  it.each(LATER)('%s is told so and nothing else', (_what, text, expected) => {
    const found = folder.problems(text);
    expect(found.map((line) => line.replace(/^trial\.yaml:\d+:\d+: /, ''))).toEqual([expected]);
    expect(found[0]).toMatch(/^trial\.yaml:\d+:\d+: /);
  });

  it('does not hide other mistakes', () => {
    const text = `${changed('radius: 1000 m', 'radius: 1000')}modem: { physics: on }\n`;
    const keys = folder.problems(text).map((line) => line.split(': ')[1]);
    expect(keys).toEqual(['mission.keepIn.radius', 'modem.physics']);
  });

  it('is not what physics off and the built shapes, kinds and ways are', () => {
    const kept = ['modem.physics=off', 'mission.sharing=solo', 'mission.spacing=even', 'limits.gapRms=4 %'];
    expect(folder.problems(GOOD, kept)).toEqual([]);
  });
});
