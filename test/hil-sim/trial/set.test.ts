/** `--set path=value`: what it changes, and what it says when it cannot. */
import fc from 'fast-check';
import { afterAll, describe, expect, it } from 'vitest';
import { formatProblem, loadTrial } from '../../../hil-sim/trial/load.ts';
import { GOOD, TrialFolder, after } from '../../support/trial-text.ts';

const folder = new TrialFolder();
afterAll(() => folder.remove());

const FAULTS = after('faults:\n  - { at: 1 min, kind: link, loss: 10 % }\n  - { at: 2 min, kind: fix, outage: true }');
const DEG = Math.PI / 180;

describe('--set', () => {
  it('names list items by name, also where the vehicle has only overrides', () => {
    const { vehicles, each } = folder.trial(GOOD, ['fleet.vehicles.cobalt.compass.bias=2 deg']).fleet;
    expect(vehicles[1]!.compass).toEqual({ bias: 2 * DEG });
    expect(vehicles[0]!.compass).toBeUndefined();
    expect(each.compass.bias).toBe(DEG);
  });

  it('names list items by number, and appends', () => {
    const { faults } = folder.trial(FAULTS, ['faults.0.loss=50 %', 'faults.+={ at: 3 min, kind: fix, outage: true }']);
    expect(faults.map((fault) => fault.at)).toEqual([60, 120, 180]);
    expect(faults[0]).toMatchObject({ kind: 'link', loss: 0.5 });
  });

  it('appends to a list that is not there yet', () => {
    const { faults } = folder.trial(GOOD, ['faults.+={ at: 1 min, kind: fix, outage: true }']);
    expect(faults).toHaveLength(1);
  });

  it('is applied in order, after files are joined', () => {
    folder.write('modem.yaml', '# Modem: a longer slot.\nslot: 5 s\n');
    const sets = ['modem.slot=6 s', 'modem.slot=7 s', 'title=B=C'];
    const { modem, title } = folder.trial(after('modem: modem.yaml'), sets);
    expect([modem.slot, title]).toEqual([7, 'B=C']);
  });

  it('reads values as YAML, whole groups too', () => {
    const { mission } = folder.trial(GOOD, [
      'mission.loop={ shape: circle, centre: { east: 1 m, north: 2 m }, radius: 200 m, turn: anticlockwise }',
      'mission.spacing=[0, 0.25]',
    ]);
    expect(mission.loop.centre).toEqual({ east: 1, north: 2 });
    expect(mission.spacing).toEqual([0, 0.25]);
  });

  it('mends what is wrong in the file', () => {
    expect(folder.problems(GOOD.replace('duration: 10 min', 'duration: long'), ['duration=5 min'])).toEqual([]);
  });

  const FORM = 'must be path=value, e.g. mission.sharing=solo or fleet.vehicles.amber.compass.bias=\'2 deg\'';
  const WRONG: [string, string][] = [
    ['title', `has no '=', but ${FORM}`],
    ['=1', `is no key path, but ${FORM}`],
    ['a..b=1', `a..b: is no key path, but ${FORM}`],
    ['mission.__proto__.x=1', `mission.__proto__.x: is no key path, but ${FORM}`],
    ['title.x=1', 'title.x: goes into title, which is a single value, but must end there'],
    ['fleet.vehicles.jade.battery=1 kWh', 'fleet.vehicles.jade.battery: names \'jade\', which is no item of '
      + 'fleet.vehicles, but must be amber, cobalt, 0 to 1 or + to append'],
    ['fleet.vehicles.2.battery=1 kWh', 'fleet.vehicles.2.battery: names \'2\', which is no item of fleet.vehicles, '
      + 'but must be amber, cobalt, 0 to 1 or + to append'],
    ['faults.0.loss=1 %', 'faults.0.loss: names \'0\', which is no item of faults, but must be + to append'],
    ['mission.depth=40', 'mission.depth: is 40 without a unit, but must be a number with a unit (m, km, cm, nmi)'],
    ['mission.depth=', 'mission.depth: is empty, but must be a number with a unit (m, km, cm, nmi)'],
    ['mission.dept=4 m', 'mission.dept: is no key here, but must be loop, spacing, depth, sharing, keepIn, keepOut, '
      + 'recovery or formedUp; did you mean depth?'],
    ['mission.loop.turn=[', 'mission.loop.turn: is not YAML: Flow sequence must end with a ]'],
    ['mission.loop.turn=[&a 1, *a]', 'mission.loop.turn.1: is an alias, but must be written out'],
    ['fleet.vehicles.cobalt.name=amber', 'fleet.vehicles.1.name: is amber, the name of fleet.vehicles.0, '
      + 'but must be unique'],
    ['water={ currents: [{ kind: uniform, set: 1 deg, drift: 1 m/s, drft: 1 m/s }] }', 'water.currents.0.drft: '
      + 'is no key here, but must be kind, set or drift; did you mean drift?'],
    ['constructor.name=x', 'constructor: is no key here, but must be title, seed, start, duration, tick, datum, '
      + 'mission, fleet, onboard, water, modem, faults, orders or limits'],
  ];
  it.each(WRONG)('says what is wrong with %s, in place of a line', (setting, expected) => {
    expect(folder.problems(GOOD, [setting])[0]).toBe(`--set ${setting}: ${expected}`);
  });

  it('is the place of what is missing in it, though the file has it', () => {
    const setting = 'mission.recovery={ east: 0 m }';
    expect(folder.problems(GOOD, [setting])).toEqual([
      `--set ${setting}: mission.recovery.north: is missing, but must be a number with a unit (m, km, cm, nmi)`,
    ]);
  });

  it('shows no more of a long one than fits, and cannot exhaust the parser', () => {
    expect(folder.problems(GOOD, [`title=${'['.repeat(1e6)}`])).toEqual([
      `--set title=${'['.repeat(113)}…: title: is nested more than 64 deep, but must be flatter`,
    ]);
  });

  it('never throws, whatever it is', () => {
    const step = fc.constantFrom('mission', 'loop', 'fleet', 'vehicles', 'amber', '0', '+', 'title', 'toString', 'x');
    const path = fc.array(step, { minLength: 1, maxLength: 5 }).map((steps) => steps.join('.'));
    const setting = fc.tuple(fc.oneof(path, fc.string()), fc.string()).map(([left, right]) => `${left}=${right}`);
    fc.assert(fc.property(fc.array(setting, { maxLength: 3 }), (sets) => {
      folder.problems(GOOD, sets);
    }), { numRuns: 200 });
  });
});

describe('the seed', () => {
  it('of the caller stands in place of the file’s, and is told as its own', () => {
    const path = folder.write('trial.yaml', after('seed: 4'));
    expect(loadTrial(path)).toMatchObject({ ok: true, trial: { seed: 4 } });
    expect(loadTrial(path, { seed: 9 })).toMatchObject({ ok: true, trial: { seed: 9 } });
    const wrong = loadTrial(path, { seed: -1 });
    const told = wrong.ok ? [] : wrong.problems.map(formatProblem);
    expect(told).toEqual(['--seed -1: seed: is -1, but must be at least 0']);
  });
});
