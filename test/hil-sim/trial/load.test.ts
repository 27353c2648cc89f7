import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { formatProblem, loadTrial } from '../../../hil-sim/trial/load.ts';
import { missionsOf } from '../../../hil-sim/trial/missions.ts';
import { seaPlan } from '../../../hil-sim/trial/plan.ts';
import { resolvedYaml } from '../../../hil-sim/trial/resolve.ts';
import { missionSchema } from '../../../messages/mission.ts';

const DEMO = 'configs/trials/marrow-bank.yaml';
let folder = '';

beforeAll(() => { folder = mkdtempSync(join(tmpdir(), 'drywake-trials-')); });
afterAll(() => { rmSync(folder, { recursive: true, force: true }); });

const GOOD = `title: A test
duration: 10 min
datum: { lat: 58.4, lon: -9.5 }
mission:
  loop: { shape: circle, centre: { east: 0 m, north: 0 m }, radius: 300 m, turn: clockwise }
  keepIn: { shape: circle, centre: { east: 0 m, north: 0 m }, radius: 1000 m }
  recovery: { east: -600 m, north: 0 m }
fleet:
  vehicles:
    - { name: amber, start: { east: 0 m, north: 300 m } }
    - { name: cobalt, start: { east: 0 m, north: -300 m } }
water: {}
`;

function problems(text: string, sets: string[] = []): string[] {
  const path = join(folder, 'trial.yaml');
  writeFileSync(path, text);
  const loaded = loadTrial(path, { sets });
  return loaded.ok ? [] : loaded.problems.map((problem) => formatProblem(problem).replace(/^\S*trial\.yaml/, 'trial.yaml'));
}

const change = (from: string | RegExp, to: string): string => {
  const changed = GOOD.replace(from, to);
  expect(changed).not.toBe(GOOD);
  return changed;
};

describe('loadTrial', () => {
  it('takes the demo and the smoke trial', () => {
    for (const path of [DEMO, 'configs/trials/smoke.yaml']) expect(loadTrial(path)).toMatchObject({ ok: true });
    expect(problems(GOOD)).toEqual([]);
  });

  const BAD: [string, () => string, RegExp][] = [
    ['an unknown key, with a guess', () => change('recovery:', 'recovry:'), /^trial\.yaml:7:3: mission\.recovry: is no key here; .*did you mean recovery\?/m],
    ['a missing section', () => change('water: {}\n', ''), /water: is missing, but must be a group of keys/],
    ['a number without a unit', () => change('radius: 300 m', 'radius: 300'), /^trial\.yaml:5:\d+: mission\.loop\.radius: is 300 without a unit/m],
    ['a wrong unit', () => change('radius: 300 m', 'radius: 300 s'), /unit 's', but must be a number with a unit \(m, /],
    ['not a number', () => change('radius: 300 m', 'radius: .nan'), /radius: is NaN without a unit/],
    ['a loop too tight for the current', () => change('radius: 300 m, turn', 'radius: 5 m, turn'), /too tight for amber.* at least/],
    ['a start outside keepIn', () => change('north: -300 m', 'north: -1300 m'), /start of cobalt reaches 1300 m .* within its 1000 m/],
    ['a duplicate name', () => change('name: cobalt', 'name: amber'), /is amber, which vehicle 1 of the list has already/],
    ['a slot that cannot hold its frame', () => `${GOOD}modem: { slot: 1 s }\n`, /modem\.slot: is 1 s, but must hold 0\.2 s turn-on, 0\.4 s air time, 0\.05 s guard and 1\.429 s travel/],
    ['a wrong word, with a guess', () => change('turn: clockwise', 'turn: clockwize'), /must be clockwise or anticlockwise; did you mean clockwise\?/],
    ['a duplicate key', () => `${GOOD}title: Again\n`, /YAML: Map keys must be unique/],
    ['broken YAML', () => `${GOOD}modem: { slot: [\n`, /YAML: /],
    ['a list where keys belong', () => change('water: {}', 'water: []'), /water: is a list of 0, but must be a group of keys/],
    ['speeds out of order', () => change('start: { east: 0 m, north: 300 m }', 'speed: { min: 2 m/s }, start: { east: 0 m, north: 300 m }'), /min 2 m\/s, cruise 1\.2 m\/s/],
    ['a spacing list of another length', () => change('  recovery', '  spacing: [0, 0.25, 0.5]\n  recovery'), /has 3 offsets, but must have one per vehicle: 2/],
    ['a place given twice', () => change('  recovery', '  spacing: [0.25, 0.25]\n  recovery'), /same offset twice/],
    ['an odd tick', () => change('duration:', 'tick: 7 s\nduration:'), /tick: is 7 s, but must divide 10 s/],
    ['an area beyond what frames can say', () => change('radius: 1000 m', 'radius: 5000 m'), /reaches 5000 m .* to 4094 m/],
    ['a fault key that its kind does not have', () => `${GOOD}faults: [{ at: 1 min, kind: fix, loss: 3 % }]\n`, /^trial\.yaml:13:\d+: faults\.0\.loss: is no key here/m],
    ['a fault that does nothing', () => `${GOOD}faults: [{ at: 1 min, kind: link }]\n`, /faults\.0: changes nothing/],
    ['a fault with two ways at once', () => `${GOOD}faults: [{ at: 1 min, kind: compass, step: 3 deg, bias: 1 deg }]\n`, /has step and bias of step, bias, drift, but must have one/],
    ['a fault of an unknown kind', () => `${GOOD}faults: [{ at: 1 min, kind: compas, step: 3 deg }]\n`, /did you mean compass\?/],
    ['a fault of a stranger', () => `${GOOD}faults: [{ at: 1 min, kind: fix, vehicle: jade, outage: true }]\n`, /is jade, but must be a vehicle of the fleet: amber, cobalt/],
    ['an order after the end', () => `${GOOD}orders: [{ at: 1 h, order: home }]\n`, /orders\.0\.at: is 1 h, but the trial ends at 10 min/],
    ['an unknown limit', () => `${GOOD}limits: { crossTrack: 5 m }\n`, /limits\.crossTrack: is no key here/],
    ['a stranger among the excepted', () => `${GOOD}limits: { except: [jade] }\n`, /is jade, but must be a vehicle of the fleet/],
    ['a setting out of range', () => `${GOOD}onboard: { converge: 1 m }\n`, /onboard\.converge: is 1 m, but must be 2 m to 500 m/],
    ['an alias in place of a value', () => `${GOOD}x: &a 1\ny: *a\n`, /is an alias/],
  ];
  it.each(BAD)('places %s', (_what, text, expected) => {
    expect(problems(text()).join('\n')).toMatch(expected);
  });

  it('tells all mistakes of a file at once, in order of place', () => {
    const text = GOOD.replace('radius: 300 m', 'radius: 300').replace('recovery:', 'recovry:').replace('duration: 10 min', 'duration: long');
    const found = problems(text);
    expect(found.length).toBeGreaterThanOrEqual(4);
    const lines = found.map((line) => Number(/:(\d+):/.exec(line)?.[1] ?? 0));
    expect(lines).toEqual([...lines].sort((a, b) => a - b));
  });

  it.each([
    ['mission.loop.shape=ellipse'], ['mission.sharing=consensus'], ['mission.spacing=time'], ['modem.physics=on'], ['mission.loop.moving={set: 1 deg, drift: 1 m/s}'],
    ['water.currents=[{kind: forecast, file: x.nc}]'], ['faults=[{at: 1 min, kind: deaf, vehicle: amber}]'], ['mission.loops={}'],
  ])('refuses %s as not built yet, never as unknown', (setting) => {
    const found = problems(GOOD, [setting]).join('\n');
    expect(found).toContain('is not built yet');
    expect(found).not.toContain('is no key here');
  });

  it('applies --set after joining, by name, by number, by appending, and says what is wrong with one', () => {
    const loaded = loadTrial(DEMO, {
      sets: ['fleet.vehicles.amber.compass.bias=2 deg', 'faults.0.loss=50 %', 'faults.+={ at: 1 h, kind: fix, outage: true }', 'mission.sharing=solo'],
    });
    expect(loaded.ok && loaded.trial.fleet.vehicles[0]!.compass?.bias).toBeCloseTo((2 * Math.PI) / 180, 12);
    expect(loaded.ok && loaded.trial.faults.length).toBe(4);
    expect(loaded.ok && loaded.trial.mission.sharing).toBe('solo');
    expect(problems(GOOD, ['fleet.vehicles.jade.turnRate=3 deg/s']).join()).toContain('\'jade\' is no item of fleet.vehicles');
    expect(problems(GOOD, ['title']).join()).toContain('has no \'=\'');
    expect(problems(GOOD, ['title.x=1']).join()).toContain('is a single value');
    expect(problems(GOOD, ['mission.depth=40']).join()).toContain('--set mission.depth=40: mission.depth: is 40 without a unit');
  });

  it('answers one clean line for a file that is not there, a folder, junk, nothing, or itself', () => {
    const at = (name: string, text: string | Uint8Array): string => {
      writeFileSync(join(folder, name), text);
      return join(folder, name);
    };
    mkdirSync(join(folder, 'sub'), { recursive: true });
    const one = (path: string): string => {
      const loaded = loadTrial(path);
      expect(loaded.ok).toBe(false);
      return loaded.ok ? '' : loaded.problems.map(formatProblem).join('\n');
    };
    expect(one(join(folder, 'nothing.yaml'))).toMatch(/nothing\.yaml: does not exist$/);
    expect(one(join(folder, 'sub'))).toContain('is a folder');
    expect(one(at('junk.yaml', Uint8Array.from({ length: 64 }, (_, index) => index * 7)))).toContain('is not text');
    expect(one(at('empty.yaml', ''))).toContain('is empty');
    expect(one(at('itself.yaml', 'title: x\nmission: itself.yaml\n'))).toContain('names itself');
    expect(one(at('missing.yaml', 'title: x\nmission: none.yaml\n'))).toMatch(/mission: names the file 'none\.yaml', which cannot be used/);
  });

  it('never throws, whatever the text', () => {
    fc.assert(fc.property(fc.string({ maxLength: 200 }), (junk) => {
      problems(junk);
      problems(`${GOOD}\n${junk}`);
    }), { numRuns: 200 });
  });
});

describe('resolvedYaml', () => {
  it('repeats the trial: loading it gives the very same one, and the same plans', () => {
    const first = loadTrial(DEMO, { sets: ['fleet.vehicles.amber.compass.bias=2 deg', 'water.currents.0.set=70.123 deg', 'modem.link.loss=17.3 %'] });
    if (!first.ok) throw new Error('the demo loads');
    const path = join(folder, 'resolved.yaml');
    writeFileSync(path, resolvedYaml(first.trial));
    const again = loadTrial(path);
    expect(again).toEqual(first);
    if (!again.ok) return;
    expect(seaPlan(again.trial)).toEqual(seaPlan(first.trial));
    expect(resolvedYaml(again.trial)).toBe(resolvedYaml(first.trial));
  });
});

describe('missionsOf', () => {
  it('makes a mission per vehicle that fits its schema and tells nothing of water, faults or limits', () => {
    const loaded = loadTrial(DEMO);
    if (!loaded.ok) throw new Error('the demo loads');
    const missions = missionsOf(loaded.trial);
    expect(missions).toHaveLength(5);
    for (const mission of missions) {
      expect(missionSchema.safeParse(mission).error).toBeUndefined();
      expect(JSON.stringify(mission)).not.toMatch(/eddy|tide"|loss|limit|fault|outage|biasIs/);
    }
    expect(missions[2]!.offsets).toEqual([0, 0.2, 0.4, 0.6, 0.8]);
  });
});
