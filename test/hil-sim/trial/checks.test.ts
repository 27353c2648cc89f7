/**
 * What the keys of a trial must be to each other. The bounds are worked out beside each row from the
 * formulas of METHODS A8 (slots) and A20 (turn rate on a ring in a current), and from the message's own.
 */
import { afterAll, describe, expect, it } from 'vitest';
import { GOOD, TrialFolder, after, changed } from '../../support/trial-text.ts';

const folder = new TrialFolder();
afterAll(() => folder.remove());

const mission = (line: string): string => changed('  recovery', `  ${line}\n  recovery`);
const each = (keys: string): string => changed('fleet:', `fleet:\n  each: { ${keys} }`);
const currents = (text: string, from = GOOD): string => changed('water: {}', `water: { currents: [${text}] }`, from);
const faults = (keys: string): string => after(`faults: [{ at: 1 min, ${keys} }]`);
const circle = (east: number, north: number, radius: number): string =>
  `{ shape: circle, centre: { east: ${east} m, north: ${north} m }, radius: ${radius} m }`;

const WRONG: [string, string, string[]][] = [
  // (1.2 + 0)² / (1.2 · 5 deg/s) = 13.75 m
  ['a loop tighter than the vehicles turn', changed('radius: 300 m, turn', 'radius: 13.7 m, turn'), [
    'trial.yaml:5:69: mission.loop.radius: is 13.7 m, too tight for amber, but must be at least 13.75 m '
    + 'at 1.2 m/s cruise, 0 m/s of current and 5 deg/s of turn',
  ]],
  // Tide 0.3, eddy 0.2, shear 0.001/s · 300 m = 0.3, uniform 0.1: f = 0.9; (1.2 + 0.9)² / (1.2 · 0.2 deg/s) = 1053 m
  ['a loop too tight for the slowest to turn, in all currents at once', currents(
    '{ kind: tide, period: 12 h, major: 0.1 m/s, minor: -0.3 m/s, bearing: 0 deg }, '
    + '{ kind: eddy, centre: { east: 0 m, north: 0 m }, radius: 9 m, peak: 0.2 m/s, turn: clockwise }, '
    + '{ kind: shear, bearing: 0 deg, gradient: -0.1 m/s, over: 100 m }, '
    + '{ kind: uniform, set: 0 deg, drift: 0.1 m/s }',
    changed('{ name: cobalt,', '{ name: cobalt, turnRate: 0.2 deg/s,'),
  ), [
    'trial.yaml:5:69: mission.loop.radius: is 300 m, too tight for cobalt, but must be at least 1053 m '
    + 'at 1.2 m/s cruise, 0.9 m/s of current and 0.2 deg/s of turn',
  ]],
  // The shear's line runs through the datum: 700 m off and 300 m of loop make 1000 m, at 0.0016/s.
  ['currents that outrun a vehicle', currents(
    '{ kind: shear, bearing: 90 deg, gradient: 0.16 m/s, over: 100 m }',
    changed('circle, centre: { east: 0 m, north: 0 m }', 'circle, centre: { east: 0 m, north: 700 m }'),
  ), [
    'trial.yaml:13:20: water.currents: may add up to 1.6 m/s on the loop, but must stay below the 1.6 m/s '
    + 'that amber can make',
  ]],
  ['a loop that leaves keepIn', changed('radius: 300 m, turn', 'radius: 1001 m, turn'), [
    'trial.yaml:5:9: mission.loop: puts the loop 1001 m from the centre of keepIn, '
    + 'but must stay within its 1000 m',
  ]],
  ['a start outside keepIn', changed('north: -300 m', 'north: -1300 m'), [
    'trial.yaml:12:30: fleet.vehicles.1.start: puts the start of cobalt 1300 m from the centre of keepIn, '
    + 'but must stay within its 1000 m',
  ]],
  ['a recovery outside keepIn', changed('east: -600 m', 'east: -1600 m'), [
    'trial.yaml:7:13: mission.recovery: puts the recovery place 1600 m from the centre of keepIn, '
    + 'but must stay within its 1000 m',
  ]],
  ['a start and a recovery where nothing may be', mission(`keepOut: [${circle(-650, 0, 60)}, ${circle(0, 310, 9)}]`)
    .replace('north: 300 m', 'north: 305 m'), [
    'trial.yaml:8:13: mission.recovery: puts the recovery place inside mission.keepOut.0, but must lie outside',
    'trial.yaml:12:29: fleet.vehicles.0.start: puts the start of amber inside mission.keepOut.1, '
    + 'but must lie outside',
  ]],
  ['a keepOut on the line', mission(`keepOut: [${circle(300, 0, 1)}]`), [
    'trial.yaml:7:13: mission.keepOut.0: covers part of the loop, but must leave it clear',
  ]],
  // A frame's positions are 12 bits of 2 m either way, 4094 m.
  ['an area beyond what frames can say', `${changed('radius: 1000 m', 'radius: 4095 m')}modem: { slot: 7 s }\n`, [
    'trial.yaml:6:11: mission.keepIn: reaches 4095 m from the datum, but must stay within the 4094 m '
    + 'that frames can say: move the datum or shrink the area',
  ]],
  ['an area off the datum that reaches too far', `${changed(
    'keepIn: { shape: circle, centre: { east: 0 m, north: 0 m }, radius: 1000 m',
    'keepIn: { shape: circle, centre: { east: -3000 m, north: 0 m }, radius: 4000 m',
  )}modem: { slot: 7 s }\n`, [
    'trial.yaml:6:11: mission.keepIn: reaches 7000 m from the datum, but must stay within the 4094 m '
    + 'that frames can say: move the datum or shrink the area',
  ]],
  ['a line on the ground', mission('depth: 200 m'), [
    'trial.yaml:7:10: mission.depth: is 200 m, but must be above the bottom at 200 m',
  ]],
  ['a start on the ground', changed('north: -300 m', 'north: -300 m, depth: 200 m'), [
    'trial.yaml:12:65: fleet.vehicles.1.start.depth: is 200 m, but must be above the bottom at 200 m',
  ]],
  ['two starts in one place', changed('north: -300 m', 'north: 300.5 m'), [
    'trial.yaml:12:30: fleet.vehicles.1.start: is that of amber, but must be a place of its own',
  ]],
  // 0.2 + 8 · 32 / 640 + 0.05 + 2000 / 1400 = 2.0786 s
  ['a slot that cannot hold its frame', after('modem: { slot: 2.07 s }'), [
    'trial.yaml:14:16: modem.slot: is 2.07 s, but must hold 0.2 s turn-on, 0.4 s air time, 0.05 s guard and '
    + '1.429 s travel across keepIn: at least 2.079 s',
  ]],
  ['a frame of another size', after('modem: { frame: 64 B }'), [
    'trial.yaml:14:17: modem.frame: is 64 B, but must be 32 B, the agents\' frame',
  ]],
  ['one name for two', changed('name: cobalt', 'name: amber'), [
    'trial.yaml:12:15: fleet.vehicles.1.name: is amber, the name of fleet.vehicles.0, but must be unique',
  ]],
  ['a name that stands for every vehicle', changed('name: cobalt', 'name: all'), [
    'trial.yaml:12:15: fleet.vehicles.1.name: is all, but must be another name: this one stands for all',
  ]],
  ['speeds out of order in one vehicle', changed('{ name: cobalt,', '{ name: cobalt, speed: { min: 2 m/s },'), [
    'trial.yaml:12:30: fleet.vehicles.1.speed: has min 2 m/s, cruise 1.2 m/s, max 1.6 m/s, '
    + 'but must be in that order',
  ]],
  ['speeds out of order in all, once', each('speed: { max: 1 m/s }'), [
    'trial.yaml:10:18: fleet.each.speed: has min 0.5 m/s, cruise 1.2 m/s, max 1 m/s, but must be in that order',
  ]],
  ['fixes more often than ticks', each('fix: { every: 0.5 s }'), [
    'trial.yaml:10:25: fleet.each.fix.every: is 0.5 s, but must be at least a tick of 1 s',
  ]],
  ['a fix that comes after the next', each('fix: { every: 10 s, latency: 10 s }'), [
    'trial.yaml:10:40: fleet.each.fix.latency: is 10 s, but must be less than the 10 s between fixes',
  ]],
  // 60 s · (30 + 60) W = 5400 J = 1.5 Wh
  ['a battery of the wrong unit', each('battery: 2 J'), [
    'trial.yaml:10:20: fleet.each.battery: is 2 J, but must last 1 min of cruise at 90 W: at least 1.5 Wh',
  ]],
  ['a spacing of another length', mission('spacing: [0, 0.25, 0.5]'), [
    'trial.yaml:7:12: mission.spacing: has 3 offsets, but must have one per vehicle: 2',
  ]],
  ['a place for two', mission('spacing: [0.25, 0.25]'), [
    'trial.yaml:7:19: mission.spacing.1: is 0.25 again, but must be a place of its own',
  ]],
  ['a tick that rows do not fall on', after('tick: 3 s'), [
    'trial.yaml:14:7: tick: is 3 s, but must divide 10 s, the step of tracks.csv',
  ]],
  ['a duration of half a tick', changed('duration: 10 min', 'duration: 600.5 s'), [
    'trial.yaml:2:11: duration: is 600.5 s, but must be a whole number of ticks of 1 s',
  ]],
  ['a duration of no tick', changed('duration: 10 min', 'duration: 1e-10 s', changed('hold: 2 min', 'hold: 1e-11 s')), [
    'trial.yaml:2:11: duration: is 1e-10 s, but must be a whole number of ticks of 1 s',
  ]],
  ['a day that the calendar does not have', after('start: 2027-02-29T06:00Z'), [
    'trial.yaml:14:8: start: is 2027-02-29T06:00Z, but must be a day and a time that there is',
  ]],
  ['a trial too short to form up in', changed('hold: 2 min', 'hold: 10 min'), [
    'trial.yaml:8:21: mission.formedUp.hold: is 10 min, but must be less than the trial\'s 10 min, '
    + 'or no fleet counts as formed up',
  ]],
  ['a stranger among the excepted', after('limits: { except: [jade] }'), [
    'trial.yaml:14:20: limits.except.0: is jade, but must be a vehicle of the fleet: amber, cobalt',
  ]],
  ['everybody excepted', after('limits: { except: [amber, cobalt] }'), [
    'trial.yaml:14:19: limits.except: names every vehicle, but must leave one to be measured',
  ]],
  ['a fault that changes nothing', faults('kind: link'), [
    'trial.yaml:14:10: faults.0: changes nothing, but must have one or more of loss, burst, delay, jitter, '
    + 'repeat, garble',
  ]],
  ['a fault with two ways at once', faults('kind: compass, step: 3 deg, bias: 1 deg'), [
    'trial.yaml:14:10: faults.0: has step and bias, but must have one of step, bias, drift',
  ]],
  ['outliers without a size', faults('kind: fix, outliers: 10 %'), [
    'trial.yaml:14:10: faults.0: has outliers alone, but must have outlierSigma with it',
  ]],
  ['a stranger in a fault', faults('kind: link, loss: 1 %, from: ambr'), [
    'trial.yaml:14:52: faults.0.from: is ambr, but must be a vehicle of the fleet: amber, cobalt; '
    + 'did you mean amber?',
  ]],
  ['all in a list, which would be nobody', faults('kind: fix, outage: true, vehicle: [amber, all]'), [
    'trial.yaml:14:65: faults.0.vehicle.1: is all, but must be a vehicle of the fleet: amber, cobalt',
  ]],
  ['a fault at the end', after('faults: [{ at: 10 min, kind: fix, outage: true }]'), [
    'trial.yaml:14:16: faults.0.at: is 10 min, but must be before the trial\'s end at 10 min',
  ]],
  ['an order after the end', after('orders: [{ at: 1 h, order: home }]'), [
    'trial.yaml:14:16: orders.0.at: is 1 h, but must be before the trial\'s end at 10 min',
  ]],
];

/** On the very bound, or as far as one may go. */
const RIGHT: [string, string][] = [
  ['a loop as tight as the vehicles turn', changed('radius: 300 m, turn', 'radius: 13.76 m, turn')],
  ['a loop that touches keepIn', changed('radius: 300 m, turn', 'radius: 1000 m, turn')],
  ['a start on the edge of keepIn', changed('north: -300 m', 'north: -1000 m')],
  ['a keepOut inside the loop, touching it', mission(`keepOut: [${circle(100, 0, 200)}]`)],
  ['a keepOut outside the loop, touching it', mission(`keepOut: [${circle(400, 0, 100)}]`)],
  ['an area as far as frames can say', `${changed('radius: 1000 m', 'radius: 4094 m')}modem: { slot: 7 s }\n`],
  ['a slot that just holds its frame', after('modem: { slot: 2.08 s }')],
  ['one speed for all', each('speed: { min: 1 m/s, cruise: 1 m/s, max: 1 m/s }')],
  ['a fix a tick', each('fix: { every: 1 s }')],
  ['a tick of 10 s', after('tick: 10 s')],
  ['a tick of a tenth', after('tick: 0.1 s')],
  ['a leap day', after('start: 2028-02-29T23:59:59Z')],
  ['one vehicle', changed(/ {4}- \{ name: cobalt.*\n/, '')],
  ['starts above each other', changed('north: -300 m', 'north: 300 m, depth: 10 m')],
  ['everybody named in words', after('orders: [{ at: 1 min, vehicle: all, order: home }]')],
  ['an outage of one for a while', faults('for: 2 min, kind: fix, vehicle: [amber], outage: true')],
];

describe('a trial is refused that has', () => {
  it.each(WRONG)('%s', (_what, text, expected) => {
    expect(folder.problems(text)).toEqual(expected);
  });
});

describe('a trial is taken that has', () => {
  it.each(RIGHT)('%s', (_what, text) => {
    expect(folder.problems(text)).toEqual([]);
  });
});

describe('the checks', () => {
  it('are told all at once', () => {
    const text = changed('duration: 10 min', 'duration: 600.5 s', changed('north: -300 m', 'north: -1300 m'));
    expect(folder.problems(`${text}modem: { slot: 1 s }\n`).map((line) => line.split(': ')[1])).toEqual([
      'duration', 'fleet.vehicles.1.start', 'modem.slot',
    ]);
  });
});
