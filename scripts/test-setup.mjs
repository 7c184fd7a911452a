/**
 * Before the tests: dist/ is up to date, since workers and command-line tests start from its files.
 * Free when `npm test` has just built. BITASSAY_SKIP_BUILD=1 leaves dist/ alone while sources are in flux.
 */
import { ensureBuilt } from './ensure.mjs';

export default function setup() {
  if (process.env['BITASSAY_SKIP_BUILD'] !== '1') ensureBuilt();
}
