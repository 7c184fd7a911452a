/** Every example of docs/library.md compiles against the shipped types, runs against the built package, and prints what it says. */
import { execFileSync, spawnSync } from 'node:child_process';
import { mkdirSync, mkdtempSync, readFileSync, rmSync, symlinkSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';

const root = fileURLToPath(new URL('..', import.meta.url));
const text = readFileSync(join(root, 'docs/library.md'), 'utf8');
const examples = [...text.matchAll(/^```ts\n(.*?)^```/gms)].map((match) => match[1]);
const patience = 120_000;

let folder = '';

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-library-'));
  mkdirSync(join(folder, 'node_modules', '@types'), { recursive: true });
  symlinkSync(root, join(folder, 'node_modules', 'bitassay'));
  for (const name of ['vitest', '@types/node'])
    symlinkSync(join(root, 'node_modules', name), join(folder, 'node_modules', name));
  writeFileSync(join(folder, 'package.json'), '{"type": "module", "private": true}');
  const names = examples.map((example, i) => {
    const name = `example-${i}${example.includes("from 'vitest'") ? '.test' : ''}.ts`;
    writeFileSync(join(folder, name), example);
    return name;
  });
  const compiler = join(root, 'node_modules', 'typescript', 'bin', 'tsc');
  const settings = [
    '--strict',
    '--target',
    'es2023',
    '--module',
    'nodenext',
    '--types',
    'node',
    '--skipLibCheck',
  ];
  execFileSync(process.execPath, [compiler, ...settings, ...names], {
    cwd: folder,
    encoding: 'utf8',
  });
}, patience);

afterAll(() => rmSync(folder, { recursive: true, force: true }));

const numbered = examples.map((example, i) => [i, example] as const);

describe('the examples of docs/library.md', () => {
  it.each(numbered.filter(([, example]) => example.includes('// →')))(
    'number %i prints what it says',
    { timeout: patience },
    (i, example) => {
      const expected = [...example.matchAll(/^\/\/ → (.*)$/gm)].map((match) => match[1]);
      const { stdout, stderr, status } = spawnSync(process.execPath, [`example-${i}.js`], {
        cwd: folder,
        encoding: 'utf8',
      });
      expect(stderr).toBe('');
      expect(status).toBe(0);
      expect(stdout.trim().split('\n')).toEqual(expected);
    },
  );

  it.each(numbered.filter(([, example]) => example.includes("from 'vitest'")))(
    'number %i passes as a test',
    { timeout: patience },
    (i) => {
      const vitest = join(root, 'node_modules', 'vitest', 'vitest.mjs');
      const { stdout, stderr, status } = spawnSync(
        process.execPath,
        [vitest, 'run', '--root', folder, `example-${i}.test.js`],
        { cwd: folder, encoding: 'utf8' },
      );
      expect(`${stdout}${stderr}`).toMatch(/1 passed/);
      expect(status).toBe(0);
    },
  );

  it('are all there: none is left out by its form', () => {
    expect(examples.length).toBeGreaterThanOrEqual(6);
    const covered = examples.filter((e) => e.includes('// →') || e.includes("from 'vitest'"));
    expect(covered).toEqual(examples);
  });
});
