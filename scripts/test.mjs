/**
 * `npm test`: makes the clone ready, runs the tests, and ends with the line `N passed, N failed`.
 * Arguments go to vitest: `npm test -- test/bits`.
 * With BITASSAY_REQUIRE_ALL=1 a skipped test is a failed one: an optional part must not vanish unseen.
 */
import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { ensure, main, runNode } from './ensure.mjs';

// A run that dies before it has counted is one failure, not silence.
let counts = { passed: 0, failed: 1, skipped: 0 };

function test() {
  ensure();
  const folder = mkdtempSync(join(tmpdir(), 'bitassay-test-'));
  const file = join(folder, 'counts.json');
  try {
    const status = runNode(['node_modules/vitest/vitest.mjs', 'run', ...process.argv.slice(2)], {
      ...process.env,
      BITASSAY_COUNTS: file,
    });
    if (existsSync(file)) counts = JSON.parse(readFileSync(file, 'utf8'));
    if (status !== 0 && counts.failed === 0) counts.failed = 1;
    if (process.env['BITASSAY_REQUIRE_ALL'] === '1' && counts.skipped > 0) {
      console.log(`${counts.skipped} skipped where all are required`);
      counts = { passed: counts.passed, failed: counts.failed + counts.skipped, skipped: 0 };
    }
    return status || (counts.failed > 0 ? 1 : 0);
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

try {
  await main(test);
} finally {
  const skipped = counts.skipped > 0 ? `, ${counts.skipped} skipped` : '';
  console.log(`${counts.passed} passed, ${counts.failed} failed${skipped}`);
}
