/** `npm run check`: all that a machine can see without running the program. Every part runs; any fault fails. */
import { ensureInstalled, main, runNode } from './ensure.mjs';

/** @type {[string, string[]][]} */
const parts = [
  [
    'format and lint',
    ['node_modules/@biomejs/biome/bin/biome', 'check', '--error-on-warnings', '.'],
  ],
  ['types', ['node_modules/typescript/bin/tsc', '-p', 'tsconfig.json']],
  ['layers', ['scripts/layers.mjs']],
  ['dead code', ['node_modules/knip/bin/knip.js']],
];

await main(() => {
  ensureInstalled();
  const failed = parts.filter(([name, args]) => {
    console.log(`— ${name}`);
    return runNode(args) !== 0;
  });
  const names = failed.map(([name]) => name).join(', ');
  console.log(names ? `Not in order: ${names}` : `All in order: ${parts.length} parts`);
  return names ? 1 : 0;
});
