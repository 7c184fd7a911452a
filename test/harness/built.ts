import { pathToFileURL } from 'node:url';

/**
 * The built program: workers and child processes start from its files, since Node 20 runs no TypeScript. `BITASSAY_DIST` names
 * another build than that of the test setup.
 */
const dist = process.env['BITASSAY_DIST'];

/** @param name  relative to the build, as in `cli/main.js` */
export function builtFile(name: string): URL {
  if (dist !== undefined) return pathToFileURL(`${dist}/${name}`);
  return new URL(`../../dist/${name}`, import.meta.url);
}
