/** The resolved trial repeats its run: loading it gives the very same trial, to the last bit. */
import fc from 'fast-check';
import { readdirSync } from 'node:fs';
import { afterAll, describe, expect, it } from 'vitest';
import { loadTrial } from '../../../hil-sim/trial/load.ts';
import { missionsOf } from '../../../hil-sim/trial/missions.ts';
import { seaPlan } from '../../../hil-sim/trial/plan.ts';
import { resolvedYaml } from '../../../hil-sim/trial/resolve.ts';
import type { Trial } from '../../../hil-sim/trial/schema.ts';
import { GOOD, TrialFolder } from '../../support/trial-text.ts';

const folder = new TrialFolder();
afterAll(() => folder.remove());

function repeats(trial: Trial): void {
  const text = resolvedYaml(trial);
  const again = folder.trial(text);
  expect(again).toStrictEqual(trial);
  expect(seaPlan(again)).toStrictEqual(seaPlan(trial));
  expect(missionsOf(again)).toStrictEqual(missionsOf(trial));
  expect(resolvedYaml(again)).toBe(text);
}

describe('resolvedYaml', () => {
  const trials = readdirSync('configs/trials').filter((name) => name.endsWith('.yaml'));
  it.each(trials)('repeats %s', (name) => {
    const loaded = loadTrial(`configs/trials/${name}`);
    expect(loaded).toMatchObject({ ok: true });
    if (loaded.ok) repeats(loaded.trial);
  });

  it('repeats what --set changed, however long its digits', () => {
    const double = (least: number, most: number) => fc.double({ min: least, max: most, noNaN: true });
    fc.assert(fc.property(
      double(-6, 6), double(0, 1), double(1e-4, 0.9), double(2, 1e5), double(-1e-3, 1e-3),
      (angle, share, speed, length, drift) => {
        repeats(folder.trial(GOOD, [
          `fleet.vehicles.amber.compass.biasIs=${angle} rad`,
          `modem.link.loss=${share * 100} %`,
          `fleet.vehicles.cobalt.clock.drift=${drift * 1e6} ppm`,
          `water.currents.+={ kind: uniform, set: ${angle * 57} deg, drift: ${speed} kn }`,
          `water.bottom=${200 + length} m`,
          `fleet.each.battery=${length} Wh`,
          `faults.+={ at: 1 min 3 ms, kind: compass, drift: ${share} deg/h }`,
        ]));
      },
    ), { numRuns: 100 });
  });

  it('fills in every default, with units', () => {
    const text = resolvedYaml(folder.trial(GOOD));
    for (const line of ['tick: 1 s', 'turnRate: 5 deg/s', 'battery: 2 kWh', 'slot: 4 s', 'loss: 0 %', 'seed: 1']) {
      expect(text).toContain(`${line}\n`);
    }
    expect(text).toMatch(/^# /);
    expect(text).not.toMatch(/[&*]a\d/);
  });

  it('keeps its order of keys, whatever that of the file', () => {
    const turned = `water: {}\n${GOOD.replace('water: {}\n', '')}`;
    expect(resolvedYaml(folder.trial(turned))).toBe(resolvedYaml(folder.trial(GOOD)));
  });

  it('quotes a title that YAML would read as something else', () => {
    for (const title of ['yes: no', '# 1', '5', 'null', '[a]', '&a', 'a\nb', '- x', '"', '~']) {
      repeats(folder.trial(GOOD.replace('A test', JSON.stringify(title))));
    }
  });
});
