/**
 * `npm test`: builds, checks every type, runs every test. The last line reads `N passed, N failed`;
 * the exit status is 0 only if nothing failed and something ran.
 */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';

const root = new URL('..', import.meta.url).pathname;
const only = process.argv.slice(2);
let passed = 0;
let failed = 0;

/** Runs a package's command in the checkout, its output passed on; true if it ended well. */
function run(command, args) {
  const bin = join(root, 'node_modules', '.bin', command);
  return spawnSync(bin, args, { cwd: root, stdio: 'inherit' }).status === 0;
}

function count(sentence, ok) {
  if (ok) passed += 1;
  else failed += 1;
  console.log(`${ok ? 'ok' : 'FAILED'}: ${sentence}`);
}

count('the product compiles', spawnSync('npm', ['run', '--silent', 'build'], { cwd: root, stdio: 'inherit' }).status === 0);
count('product and tests have no type errors', run('tsc', ['-p', 'test/tsconfig.json']));

/** Tests that start processes and look at the wall clock run alone, after the others. */
const ALONE = ['test/hil-sim/run/processes.test.ts', 'test/fleet/wire.test.ts', 'test/hil-sim/shell'];

/** Runs vitest over some files and adds what it counted. */
function runTests(title, args) {
  const folder = mkdtempSync(join(tmpdir(), 'drywake-test-'));
  const results = join(folder, 'results.json');
  const ended = run('vitest', [
    'run', '--config', 'test/vitest.config.ts', '--passWithNoTests',
    '--reporter=default', '--reporter=json', `--outputFile.json=${results}`, ...args,
  ]);
  try {
    const report = JSON.parse(readFileSync(results, 'utf8'));
    passed += report.numPassedTests;
    failed += report.numFailedTests;
    const left = report.numTotalTests - report.numPassedTests - report.numFailedTests;
    if (left > 0) count(`${title}: ${left} tests were left out; a test that needs something fails, it is not left out`, false);
    if (!ended && report.numFailedTests === 0) count(`${title}: the test run ended well`, false);
  } catch {
    count(`${title}: the test run left its results`, false);
  }
  rmSync(folder, { recursive: true, force: true });
}

if (only.length > 0) {
  runTests('the tests asked for', only);
} else {
  runTests('tests', ALONE.flatMap((path) => ['--exclude', path.endsWith('.ts') ? path : `${path}/**`]));
  runTests('tests with processes', ['--no-file-parallelism', ...ALONE]);
}

console.log(`${passed} passed, ${failed} failed`);
process.exit(failed === 0 && passed > 2 ? 0 : 1);
