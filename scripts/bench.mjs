/**
 * `npm run bench`: compiles bench/ beside the sources into .bench/ (Node 20 does not run TypeScript), then runs
 * every file of it, or those whose names hold one of the words given: `npm run bench -- rans`.
 * The open data files stand in the folder that BITASSAY_DATASETS names.
 */
import { copyFileSync, readdirSync, rmSync } from 'node:fs';
import { join } from 'node:path';
import { ensureDatasets } from './datasets.mjs';
import { ensureInstalled, main, root, runNode, SetupError, tsc } from './ensure.mjs';

await main(async () => {
  ensureInstalled();
  const words = process.argv.slice(2);
  const names = readdirSync(join(root, 'bench'))
    .filter((name) => name.endsWith('.ts') && !name.endsWith('.d.ts'))
    .filter((name) => words.length === 0 || words.some((word) => name.includes(word)))
    .sort();
  if (names.length === 0) {
    throw new SetupError(`No file of bench/ fits ${words.length > 0 ? words.join(', ') : '*.ts'}.`);
  }
  rmSync(join(root, '.bench'), { recursive: true, force: true });
  if (tsc(['-p', 'tsconfig.bench.json']).status !== 0) {
    throw new SetupError('The benchmarks do not compile: the compiler says why above.');
  }
  // The program reads its version from the package file two folders up.
  copyFileSync(join(root, 'package.json'), join(root, '.bench', 'package.json'));
  const env = { ...process.env, BITASSAY_DATASETS: await ensureDatasets() };
  const failed = names.filter((name) => {
    console.log(`\n${name}`);
    return runNode([join('.bench', 'bench', name.replace(/\.ts$/, '.js'))], env) !== 0;
  });
  return failed.length > 0 ? 1 : 0;
});
