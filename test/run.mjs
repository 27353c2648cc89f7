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

const folder = mkdtempSync(join(tmpdir(), 'drywake-test-'));
const results = join(folder, 'results.json');
const ended = run('vitest', [
  'run', '--config', 'test/vitest.config.ts',
  '--reporter=default', '--reporter=json', `--outputFile.json=${results}`, ...only,
]);
try {
  const report = JSON.parse(readFileSync(results, 'utf8'));
  passed += report.numPassedTests;
  failed += report.numFailedTests;
  const left = report.numTotalTests - report.numPassedTests - report.numFailedTests;
  if (left > 0) count(`${left} tests were left out; a test that needs something fails, it is not left out`, false);
  if (!ended && report.numFailedTests === 0) count('the test run ended well', false);
} catch {
  count('the test run left its results', false);
}
rmSync(folder, { recursive: true, force: true });

console.log(`${passed} passed, ${failed} failed`);
process.exit(failed === 0 && passed > 2 ? 0 : 1);
