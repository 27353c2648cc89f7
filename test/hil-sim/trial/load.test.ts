/** Every way in which a trial file can be wrong by itself: what is told, and where. */
import { mkdirSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { afterAll, describe, expect, it } from 'vitest';
import { loadTrial } from '../../../hil-sim/trial/load.ts';
import { GOOD, TrialFolder, after, changed } from '../../support/trial-text.ts';

const folder = new TrialFolder();
afterAll(() => folder.remove());

const LENGTH = 'must be a number with a unit (m, km, cm, nmi)';
const TIME = 'must be a number with a unit (s, ms, min, h, d)';
const TOP = 'must be title, seed, start, duration, tick, datum, mission, fleet, onboard, water, modem, '
  + 'faults, orders or limits';
const MISSION = 'must be loop, spacing, depth, sharing, keepIn, keepOut, recovery or formedUp';

const radius = (text: string): string => changed('radius: 300 m', `radius: ${text}`);
const currents = (text: string): string => changed('water: {}', `water: { currents: ${text} }`);

/** What is wrong, the file, and every line that is told. */
const WRONG: [string, string, string[]][] = [
  ['an unknown key', changed('  recovery', '  recovry: 1\n  recovery'), [
    `trial.yaml:7:3: mission.recovry: is no key here, but ${MISSION}; did you mean recovery?`,
  ]],
  ['an unknown section', after('modm: {}'), [
    `trial.yaml:14:1: modm: is no key here, but ${TOP}; did you mean modem?`,
  ]],
  ['a key that is near nothing', after('zzzzzz: 1'), [`trial.yaml:14:1: zzzzzz: is no key here, but ${TOP}`]],
  ['a key that is special to the language', after('__proto__: { a: 1 }'), [
    `trial.yaml:14:1: __proto__: is no key here, but ${TOP}`,
  ]],
  ['a key that breaks lines and steers terminals', after('"a\\e[31m\\nb": 1'), [
    `trial.yaml:14:1: a\\u001b[31m\\u000ab: is no key here, but ${TOP}`,
  ]],
  ['a missing section', changed('water: {}\n', ''), [
    'trial.yaml:1:1: water: is missing, but must be a group of keys',
  ]],
  ['a missing key', changed('  recovery: { east: -600 m, north: 0 m }\n', ''), [
    'trial.yaml:5:3: mission.recovery: is missing, but must be a group of keys',
  ]],
  ['an empty section', changed('water: {}', 'water:'), [
    'trial.yaml:13:7: water: is empty, but must be a group of keys',
  ]],
  ['a list in place of keys', changed('water: {}', 'water: []'), [
    'trial.yaml:13:8: water: is an empty list, but must be a group of keys',
  ]],
  ['keys in place of a list', currents('{ kind: uniform }'), [
    'trial.yaml:13:20: water.currents: is a group of keys, but must be a list',
  ]],
  ['a number without a unit', radius('300'), [
    `trial.yaml:5:69: mission.loop.radius: is 300 without a unit, but ${LENGTH}`,
  ]],
  ['a unit of something else', radius('300 s'), [
    `trial.yaml:5:69: mission.loop.radius: is '300 s' with the unit 's', but ${LENGTH}`,
  ]],
  ['a NaN', radius('.nan'), [`trial.yaml:5:69: mission.loop.radius: is NaN without a unit, but ${LENGTH}`]],
  ['an infinity', radius('.inf'), [
    `trial.yaml:5:69: mission.loop.radius: is Infinity without a unit, but ${LENGTH}`,
  ]],
  ['a NaN with a unit', radius('NaN m'), [
    `trial.yaml:5:69: mission.loop.radius: is 'NaN m', which is no quantity, but ${LENGTH}`,
  ]],
  ['a group in place of a quantity', radius('{ a: 1 }'), [
    `trial.yaml:5:69: mission.loop.radius: is no quantity, but ${LENGTH}`,
  ]],
  ['a quantity out of range', radius('0 m'), [
    'trial.yaml:5:69: mission.loop.radius: is 0 m, but must be more than 0 m and at most 1000000 m',
  ]],
  ['an empty quantity', changed('duration: 10 min', 'duration:'), [
    `trial.yaml:2:10: duration: is empty, but ${TIME}`,
  ]],
  ['a misspelt word', changed('turn: clockwise', 'turn: clockwize'), [
    'trial.yaml:5:82: mission.loop.turn: is "clockwize", but must be clockwise or anticlockwise; '
    + 'did you mean clockwise?',
  ]],
  ['a number in place of a word', changed('turn: clockwise', 'turn: 3'), [
    'trial.yaml:5:82: mission.loop.turn: is 3, but must be clockwise or anticlockwise',
  ]],
  ['an endless word', changed('turn: clockwise', `turn: ${'x'.repeat(5000)}`), [
    `trial.yaml:5:82: mission.loop.turn: is "${'x'.repeat(58)}…, but must be clockwise or anticlockwise`,
  ]],
  ['a name in capitals', changed('name: amber', 'name: Amber'), [
    'trial.yaml:11:15: fleet.vehicles.0.name: is "Amber", but must be lower-case letters, digits and '
    + 'hyphens; starts with a letter; 24 at most; not `sea`',
  ]],
  ['a fleet of none', changed(/vehicles:\n.*\n.*\n/, 'vehicles: []\n'), [
    'trial.yaml:10:13: fleet.vehicles: is an empty list, but must have at least 1 item',
  ]],
  ['a latitude beyond the pole', changed('lat: 58.4', 'lat: 95'), [
    'trial.yaml:3:15: datum.lat: is 95, but must be at most 89',
  ]],
  ['a latitude that is no number', changed('lat: 58.4', 'lat: 58.4N'), [
    'trial.yaml:3:15: datum.lat: is "58.4N", but must be a finite number',
  ]],
  ['half a seed', after('seed: 1.5'), ['trial.yaml:14:7: seed: is 1.5, but must be a whole number']],
  ['no title', changed('title: A test', 'title: ""'), [
    'trial.yaml:1:8: title: is "", but must have at least 1 character',
  ]],
  ['a start without a time of day', after('start: 2027-05-01'), [
    'trial.yaml:14:8: start: is "2027-05-01", but must be the time of tick 0, like 2027-05-01T06:00Z',
  ]],
  ['a spacing of no form', changed('  recovery', '  spacing: evn\n  recovery'), [
    'trial.yaml:7:12: mission.spacing: is "evn", but must be even, or a list of offsets in turns, '
    + '0 up to 1, one per vehicle',
  ]],
  ['an offset of a whole turn', changed('  recovery', '  spacing: [0, 1]\n  recovery'), [
    'trial.yaml:7:16: mission.spacing.1: is 1, but must be less than 1',
  ]],
  ['a current of an unknown kind', currents('[{ kind: tides }]'), [
    'trial.yaml:13:29: water.currents.0.kind: is "tides", but must be uniform, tide, eddy or shear; '
    + 'did you mean tide?',
  ]],
  ['a current of no kind', currents('[{ set: 3 deg }]'), [
    'trial.yaml:13:21: water.currents.0.kind: is missing, but must be uniform, tide, eddy or shear',
  ]],
  ['a key of another kind of current', currents('[{ kind: uniform, set: 0 deg, drift: 1 kn, peak: 1 kn }]'), [
    'trial.yaml:13:63: water.currents.0.peak: is no key here, but must be kind, set or drift',
  ]],
  ['an eddy without width', currents(
    '[{ kind: eddy, centre: { east: 0 m, north: 0 m }, radius: 0 m, peak: 0.1 m/s, turn: clockwise }]',
  ), [
    'trial.yaml:13:78: water.currents.0.radius: is 0 m, but must be more than 0 m and at most 1000000 m',
  ]],
  ['a fault with a key of another kind', after('faults: [{ at: 1 min, kind: fix, loss: 3 % }]'), [
    'trial.yaml:14:34: faults.0.loss: is no key here, but must be kind, at, for, vehicle, outage, jump, '
    + 'outliers or outlierSigma',
  ]],
  ['a fault of an unknown kind', after('faults: [{ at: 1 min, kind: compas, step: 3 deg }]'), [
    'trial.yaml:14:29: faults.0.kind: is "compas", but must be link, compass, log, fix, reboot or current; '
    + 'did you mean compass?',
  ]],
  ['a fault of a number', after('faults: [{ at: 1 min, kind: fix, vehicle: 3, outage: true }]'), [
    'trial.yaml:14:43: faults.0.vehicle: is 3, but must be a vehicle, or a list of them',
  ]],
  ['an order that is none', after('orders: [{ at: 1 min, order: hom }]'), [
    'trial.yaml:14:30: orders.0.order: is "hom", but must be hold, home, surface or resume; did you mean home?',
  ]],
  ['a limit on nothing', after('limits: { formUpWithn: 5 min }'), [
    'trial.yaml:14:11: limits.formUpWithn: is no key here, but must be formUpWithin, crossTrackRms, '
    + 'crossTrackMax, gapRms, separationMin, currentRms, mapRms, mapSpread, positionRms, deliveryRatioMin, '
    + 'energy, lateTicks or except; did you mean formUpWithin?',
  ]],
  ['a share beyond all', after('limits: { deliveryRatioMin: 120 % }'), [
    'trial.yaml:14:29: limits.deliveryRatioMin: is 120 %, but must be at least 0 % and at most 100 %',
  ]],
  ['a setting out of range', after('onboard: { converge: 1 m }'), [
    'trial.yaml:14:22: onboard.converge: is 1 m, but must be at least 2 m and at most 500 m',
  ]],
  ['a key given twice', after('title: Again'), [
    'trial.yaml:14:1: title: is given again, after line 1, but must be there once',
  ]],
  ['a key given twice, deep down', changed('radius: 300 m,', 'radius: 300 m, radius: 400 m,'), [
    'trial.yaml:5:76: mission.loop.radius: is given again, after line 5, but must be there once',
  ]],
  ['an alias', after('modem: { slot: &a 4 s, guard: *a }'), [
    'trial.yaml:14:31: modem.guard: is an alias, but must be written out',
  ]],
  ['a tag', after('modem: !thing { slot: 4 s }'), [
    'trial.yaml:14:8: is not YAML: Unresolved tag: !thing',
  ]],
  ['two documents', after('---\ntitle: b'), [
    'trial.yaml:14:1: begins a second document, but must be the only one',
  ]],
];

describe('loadTrial', () => {
  it('takes the good trial that the others are made of', () => {
    expect(folder.problems(GOOD)).toEqual([]);
  });

  it.each(WRONG)('places %s', (_what, text, expected) => {
    expect(folder.problems(text)).toEqual(expected);
  });

  it('tells what was found and what is allowed apart, for those who do not read', () => {
    const loaded = loadTrial(folder.write('trial.yaml', radius('300')));
    expect(loaded).toMatchObject({ ok: false, problems: [{
      line: 5, column: 69, key: 'mission.loop.radius', found: 'is 300 without a unit', allowed: LENGTH,
    }] });
  });

  it('tells all mistakes at once, in order of place', () => {
    const lines = [
      [/duration: .*/, 'duration: long'], ['radius: 300 m', 'radius: 300'], ['turn: clockwise', 'turn: left'],
      ['recovery:', 'recovry:'], ['name: cobalt', 'nam: cobalt'],
    ] as const;
    const text = lines.reduce((so, [from, to]) => changed(from, to, so), GOOD);
    const found = folder.problems(`${text}title: Again\n`).map((line) => line.split(': ').slice(0, 2).join(' '));
    expect(found).toEqual([
      'trial.yaml:2:11 duration', 'trial.yaml:5:3 mission.recovery', 'trial.yaml:5:69 mission.loop.radius',
      'trial.yaml:5:80 mission.loop.turn', 'trial.yaml:7:3 mission.recovry',
      'trial.yaml:12:7 fleet.vehicles.1.name', 'trial.yaml:12:9 fleet.vehicles.1.nam', 'trial.yaml:14:1 title',
    ]);
  });

  it('tells no more than a hundred mistakes, and how many there are', () => {
    const keys = Array.from({ length: 150 }, (_, index) => `key${index}: 1`).join('\n');
    const found = folder.problems(after(keys));
    expect(found).toHaveLength(101);
    expect(found.at(-1)).toBe('trial.yaml: has 50 problems more');
  });

  it('names broken YAML by line and column, and nothing that follows from it', () => {
    const broken = folder.problems(after('modem: { slot: ['));
    expect(broken.length).toBeGreaterThan(0);
    for (const line of broken) expect(line).toMatch(/^trial\.yaml:15:1: is not YAML: Flow /);
    expect(folder.problems(changed('  loop', '\tloop'))[0]).toMatch(/^trial\.yaml:5:1: is not YAML: Tabs /);
  });
});

describe('files that are no trial', () => {
  mkdirSync(join(folder.path, 'sub'));
  const junk = Uint8Array.from({ length: 64 }, (_, index) => index * 7);
  it.each([
    ['that is not there', () => join(folder.path, 'none.yaml'), 'none.yaml: does not exist, but must be a YAML file'],
    ['in a file', () => join(folder.write('f', GOOD), 'x.yaml'), 'x.yaml: does not exist, but must be a YAML file'],
    ['that is a folder', () => join(folder.path, 'sub'), 'sub: is a folder, but must be a YAML file'],
    ['that is a device', () => '/dev/null', 'null: is no plain file, but must be a YAML file'],
    ['of binary junk', () => folder.write('j', junk), 'j: is not text in UTF-8, but must be a YAML file'],
    ['of nothing', () => folder.write('e', ''), 'e: is empty, but must hold keys and values'],
    ['of a comment', () => folder.write('e', '# a\n'), 'e: is empty, but must hold keys and values'],
    ['of a word', () => folder.write('w', 'trial'), 'w:1:1: is "trial", but must be the keys of a trial'],
    ['of a list', () => folder.write('l', '- 1\n'), 'l:1:1: is a list of 1, but must be the keys of a trial'],
    ['of a mebibyte and more', () => folder.write('big', `# ${'x'.repeat(2 ** 20)}`),
      'big: is larger than 1 MiB, but must be a YAML file'],
  ])('has one clean line for a file %s', (_what, path, expected) => {
    expect(folder.problemsAt(path())).toEqual([expected]);
  });

  it.each([
    ['[', 65], ['{a: ', 129], ['- ', 129], ['? ', 129], ['a: ', 194], [': ', 129], ['- !t ', 321],
  ])('refuses a hundred thousand of %j before it can exhaust the parser', (piece, column) => {
    expect(folder.problems(piece.repeat(100_000))).toEqual([
      `trial.yaml:1:${column}: is nested more than 64 deep, but must be flatter`,
    ]);
  });

  it('refuses keys within keys within keys, a line each', () => {
    const text = Array.from({ length: 300 }, (_, index) => `${' '.repeat(index)}a:`).join('\n');
    expect(folder.problems(text)).toEqual(['trial.yaml:129:130: is nested more than 64 deep, but must be flatter']);
  });

  it('does not unfold aliases of aliases', () => {
    const level = (index: number): string => `- &a${index + 1} [${`*a${index}, `.repeat(6)}]`;
    const levels = Array.from({ length: 12 }, (_, index) => level(index));
    const began = performance.now();
    const found = folder.problems(['faults:', '- &a0 [x, x]', ...levels].join('\n'));
    expect(found.filter((line) => line.endsWith('is an alias, but must be written out'))).toHaveLength(72);
    // Unfolded, it has 6^12 items, two thousand million.
    expect(performance.now() - began).toBeLessThan(5000);
  });

  it('never throws, whatever the text', () => {
    const marks = fc.constantFrom(...'ab:-?[]{},&*!|>#%@"\'\n \t01~'.split(''));
    const yamlish = fc.string({ unit: marks, maxLength: 80 });
    fc.assert(fc.property(fc.oneof(fc.string({ unit: 'binary', maxLength: 200 }), yamlish), (text) => {
      for (const line of [...folder.problems(text), ...folder.problems(`${GOOD}\n${text}`)]) {
        expect(line).not.toMatch(/[\u0000-\u001f\u007f]/);
      }
    }), { numRuns: 250 });
  });

  it('never throws, whatever one key is', () => {
    const keys = GOOD.match(/\w+: (?=[\w"])[^,}\n]+/g)!;
    const odd = fc.constantFrom('[]', '{}', '~', '-1 m', '1e999 m', '0', '.nan');
    const text = fc.oneof(fc.string({ maxLength: 12 }), odd);
    fc.assert(fc.property(fc.constantFrom(...keys), text, (pair, value) => {
      folder.problems(GOOD.replace(pair, `${pair.split(':')[0]!}: ${value}`));
    }), { numRuns: 250 });
  });
});

describe('sections in files of their own', () => {
  it('are found from the file that names them, and place their own mistakes', () => {
    folder.write('sub/modem.yaml', '# Modem: a slip or two.\nslot: 4\nslt: 4 s\n');
    expect(folder.problems(after('modem: sub/modem.yaml'))).toEqual([
      `modem.yaml:2:7: modem.slot: is 4 without a unit, but ${TIME}`,
      'modem.yaml:3:1: modem.slt: is no key here, but must be carrier, bandwidth, bitRate, sourceLevel, frame, '
      + 'slot, turnOn, guard, physics or link; did you mean slot?',
    ]);
  });

  it('are told as sources, after the trial itself', () => {
    const modem = folder.write('modem.yaml', '# Modem: a longer slot.\nslot: 5 s\n');
    const path = folder.write('trial.yaml', after('modem: modem.yaml'));
    expect(loadTrial(path)).toMatchObject({ ok: true, sources: [path, modem], trial: { modem: { slot: 5 } } });
  });

  it.each([
    ['none.yaml', 'trial.yaml:14:8: modem: names the file \'none.yaml\', which does not exist, '
      + 'but must be a YAML file'],
    ['sub', 'trial.yaml:14:8: modem: names the file \'sub\', which is a folder, but must be a YAML file'],
    ['trial.yaml', 'trial.yaml:14:8: modem: names the file \'trial.yaml\', which is the trial itself, '
      + 'but must be another file'],
    ['empty.yaml', 'empty.yaml: modem: is empty, but must hold keys and values'],
    ['word.yaml', 'word.yaml:1:1: modem: is "word.yaml", but must be a group of keys'],
  ])('that are %s are told once', (name, expected) => {
    folder.write('empty.yaml', '# nothing\n');
    folder.write('word.yaml', 'word.yaml\n');
    expect(folder.problems(after(`modem: ${name}`))).toEqual([expected]);
  });

  it('that cannot be read do not hide mistakes elsewhere', () => {
    folder.write('broken.yaml', 'slot: [\n');
    const found = folder.problems(`${radius('300')}modem: broken.yaml\n`);
    expect(found.map((line) => line.split(' ')[0])).toEqual(['broken.yaml:2:1:', 'trial.yaml:5:69:']);
  });
});
