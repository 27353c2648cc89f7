/** The house rules that a machine can hold: imports, sizes, words, and what a core may not touch. */
import { execFileSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';

const root = new URL('..', import.meta.url).pathname;

const files = execFileSync('git', ['ls-files', '--cached', '--others', '--exclude-standard'], { cwd: root, encoding: 'utf8' })
  .split('\n')
  .filter((path) => path !== '' && !path.endsWith('package-lock.json'));
const text = (path: string): string => readFileSync(root + path, 'utf8');
const sources = files.filter((path) => /^(messages|onboard|hil-sim)\/.*\.ts$/.test(path));
const cores = sources.filter((path) => /^(onboard\/core|hil-sim\/sea)\//.test(path));

/** Code without comments and strings: enough for a search, not for a compiler. */
const bare = (source: string): string =>
  source.replace(/\/\*[\s\S]*?\*\//g, '').replace(/\/\/.*$/gm, '').replace(/'[^'\n]*'/g, "''");

describe('the repository', () => {
  it('keeps its import rules', () => {
    let report = '';
    try {
      execFileSync(
        root + 'node_modules/.bin/depcruise',
        ['--config', '.dependency-cruiser.mjs', '--output-type', 'err-long', 'messages', 'onboard', 'hil-sim', 'dist'],
        { cwd: root, encoding: 'utf8' },
      );
    } catch (error) {
      report = String((error as { stdout?: string }).stdout ?? error);
    }
    expect(report).toBe('');
  });

  it('has sources to look at, in both cores', () => {
    expect(sources.length).toBeGreaterThan(30);
    expect(cores.length).toBeGreaterThan(10);
  });

  it.each([
    ['Date.now', 'take the time from the sense'],
    ['new Date', 'take the time from the sense'],
    ['performance.', 'take the time from the sense'],
    ['process.', 'arguments and signals belong to the shell'],
    ['Math.random', 'draw by count'],
    ['Math.hypot', 'use Math.sqrt(a * a + b * b), whose last bits are pinned'],
    ['console.', 'a core does not print'],
    ['async ', 'a core has no promises'],
    ['await ', 'a core has no promises'],
  ])('has no %s in a core: %s', (banned) => {
    expect(cores.filter((path) => bare(text(path)).includes(banned))).toEqual([]);
  });

  it('has no module-level variables in a core', () => {
    expect(cores.filter((path) => /^(export )?let /m.test(bare(text(path))))).toEqual([]);
  });

  it('keeps files within 300 lines in cores and 400 elsewhere', () => {
    const long = sources.filter((path) => text(path).split('\n').length > (cores.includes(path) ? 301 : 401));
    expect(long).toEqual([]);
  });

  it('keeps lines within 120 columns', () => {
    const wide = sources.flatMap((path) =>
      text(path).split('\n').flatMap((line, index) => (line.length > 120 ? [`${path}:${index + 1}`] : [])));
    expect(wide).toEqual([]);
  });

  it('opens every source file with what it is', () => {
    const bareHeads = sources.filter((path) => !/^(#!.*\n)?(\/\*\*|\/\/)/.test(text(path)));
    expect(bareHeads).toEqual([]);
  });

  it('has no left-over marks, focused or skipped tests', () => {
    const marks = /\b(TODO|FIXME|XXX|HACK)\b|\.only\(|\b(it|describe|test)\.skip\(/;
    const found = files.filter((path) => /\.(ts|mjs)$/.test(path) && path !== 'test/repository.test.ts' && marks.test(text(path)));
    expect(found).toEqual([]);
  });

  it('names no registry host and no path of a machine', () => {
    const hosts = /registry\.npmjs|deb\.debian\.org|\/work\/|\/home\/|\/root\//;
    const found = files.filter((path) => path !== 'test/repository.test.ts' && hosts.test(text(path)));
    expect(found).toEqual([]);
  });

  it('says on line one of every configuration what it is for', () => {
    const configs = files.filter((path) => /^configs\/.*\.ya?ml$/.test(path));
    expect(configs.length).toBeGreaterThan(1);
    expect(configs.filter((path) => !text(path).startsWith('# '))).toEqual([]);
  });

  it('gives each dependency a reason in DEVELOPERS.md', () => {
    const wanted = JSON.parse(text('package.json')) as Record<string, Record<string, string>>;
    const names = Object.keys({ ...wanted['dependencies'], ...wanted['devDependencies'] });
    const told = text('DEVELOPERS.md');
    expect(names.filter((name) => !told.includes(`\`${name}\``))).toEqual([]);
  });
});
