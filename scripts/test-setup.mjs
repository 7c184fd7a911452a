/**
 * Before the tests: dist/ is up to date, since workers and command-line tests start from its files.
 * Free when `npm test` has just built. BITASSAY_SKIP_BUILD=1 leaves dist/ alone while sources are in flux.
 */
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { ensureBuilt } from './ensure.mjs';

export default function setup() {
  if (process.env['BITASSAY_SKIP_BUILD'] !== '1') ensureBuilt();
  // Tests neither fill nor meet the cache of whoever runs them.
  const cache = mkdtempSync(join(tmpdir(), 'bitassay-cache-'));
  process.env['BITASSAY_CACHE'] = cache;
  return () => rmSync(cache, { recursive: true, force: true });
}
