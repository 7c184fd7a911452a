/** What npm would publish, looked at from the side of the one who installs it. */
import { spawnSync } from 'node:child_process';
import {
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  statSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';

const root = fileURLToPath(new URL('..', import.meta.url));
const readJson = (name: string) => JSON.parse(readFileSync(join(root, name), 'utf8'));
const manifest = readJson('package.json');

const patience = 180_000;

function run(command: string, args: string[], cwd: string) {
  const done = spawnSync(command, args, { cwd, encoding: 'utf8', timeout: patience });
  if (done.error) throw done.error;
  return { code: done.status, stdout: done.stdout, stderr: done.stderr };
}

/** Runs what must succeed; its own words are the message where it does not. */
function mustRun(command: string, args: string[], cwd: string) {
  const done = run(command, args, cwd);
  expect(done.code, `${command} ${args.join(' ')}\n${done.stdout}${done.stderr}`).toBe(0);
  return done.stdout;
}

describe('the lists of packages', () => {
  it('name exact versions only', () => {
    const versions = Object.entries<string>({
      ...manifest.dependencies,
      ...manifest.devDependencies,
      ...manifest.optionalDependencies,
    });
    expect(versions.length).toBeGreaterThan(20);
    expect(versions.filter(([, version]) => !/^\d+\.\d+\.\d+(-[\w.]+)?$/.test(version))).toEqual(
      [],
    );
  });

  it('lock every package by its hash and none by an address', () => {
    const { packages } = readJson('package-lock.json');
    const entries = Object.entries<{ resolved?: string; integrity?: string; link?: boolean }>(
      packages,
    ).filter(([path]) => path !== '');
    expect(entries.length).toBeGreaterThan(100);
    expect(entries.filter(([, entry]) => entry.resolved !== undefined)).toEqual([]);
    expect(entries.filter(([, entry]) => !/^sha512-/.test(entry.integrity ?? ''))).toEqual([]);
  });

  it('agree with one another', () => {
    const own = readJson('package-lock.json').packages[''];
    expect(own.version).toBe(manifest.version);
    expect(own.dependencies).toEqual(manifest.dependencies);
    expect(own.devDependencies).toEqual(manifest.devDependencies);
  });
});

describe('the package', () => {
  let folder = '';
  let consumer = '';
  let packed: { path: string; mode: number }[] = [];

  beforeAll(() => {
    folder = mkdtempSync(join(tmpdir(), 'bitassay-package-'));
    consumer = join(folder, 'consumer');
    mkdirSync(consumer);
    writeFileSync(join(consumer, 'package.json'), '{"private": true, "type": "module"}\n');
    // The test setup has just built dist/; building again here would pull it from under other tests.
    const [pack] = JSON.parse(
      mustRun('npm', ['pack', '--json', '--ignore-scripts', '--pack-destination', folder], root),
    );
    packed = pack.files;
    mustRun(
      'npm',
      ['install', '--prefer-offline', '--ignore-scripts', '--no-audit', '--no-fund'].concat(
        join(folder, pack.filename),
      ),
      consumer,
    );
  }, patience);

  afterAll(() => rmSync(folder, { recursive: true, force: true }));

  const bitassay = (...args: string[]) =>
    run(join(consumer, 'node_modules', '.bin', 'bitassay'), args, consumer);

  it('holds the program, its types and its papers, and nothing of the workshop', () => {
    const paths = packed.map(({ path }) => path);
    expect(paths).toEqual(
      expect.arrayContaining([
        'CHANGELOG.md',
        'LICENSE',
        'README.md',
        'dist/cli/main.js',
        'dist/index.d.ts',
        'dist/index.js',
        'package.json',
      ]),
    );
    const expected =
      /^(dist\/[\w/.-]+\.(js|js\.map|d\.ts)|package\.json|README\.md|LICENSE|CHANGELOG\.md)$/;
    expect(paths.filter((path) => !expected.test(path))).toEqual([]);
  });

  it('has source maps that carry their sources', () => {
    const map = JSON.parse(
      readFileSync(join(consumer, 'node_modules/bitassay/dist/index.js.map'), 'utf8'),
    );
    expect(map.sourcesContent).toHaveLength(map.sources.length);
  });

  it('brings the runtime packages and no tool of development', () => {
    const modules = join(consumer, 'node_modules');
    for (const name of Object.keys(manifest.dependencies)) {
      expect(existsSync(join(modules, name)), name).toBe(true);
    }
    expect(readdirSync(modules)).not.toContain('vitest');
    expect(readdirSync(modules)).not.toContain('typescript');
  });

  it('installs a program that knows its version', () => {
    const program = join(consumer, 'node_modules/bitassay/dist/cli/main.js');
    expect(statSync(program).mode & 0o111).toBe(0o111);
    const { code, stdout, stderr } = bitassay('--version');
    expect({ code, stdout, stderr }).toEqual({
      code: 0,
      stdout: `${manifest.version}\n`,
      stderr: '',
    });
  });

  it('runs a plan in its workers', { timeout: patience }, () => {
    writeFileSync(join(consumer, 'run.log'), 'supply -18.3 C, door shut\n'.repeat(50));
    writeFileSync(
      join(consumer, 'plan.yaml'),
      'plan: 1\ncorpora:\n  log: {files: run.log, symbols: bytes, messages: lines}\ncandidates: [huffman]\ntiming: {repeats: 0}\n',
    );
    const { code, stdout, stderr } = bitassay('run', 'plan.yaml', '--workers', '2', '--json');
    expect(code, stderr).toBe(0);
    const { cells } = JSON.parse(stdout);
    expect(cells.length).toBeGreaterThan(0);
    expect(cells.filter((cell: { verified: boolean }) => !cell.verified)).toEqual([]);
  });

  it('tries a file and leaves a record with verified cells', { timeout: patience }, () => {
    const lines = Array.from(
      { length: 200 },
      (_, i) => `container ${100 + (i % 7)} supply ${-18 + ((i * i) % 5)} door shut\n`,
    );
    writeFileSync(join(consumer, 'sample.log'), lines.join(''));
    const { code, stdout, stderr } = bitassay('try', 'sample.log', '--json');
    expect(code, stderr).toBe(0);
    const record = JSON.parse(stdout);
    expect(record.record).toBe(1);
    expect(record.cells.length).toBeGreaterThan(0);
    const wrong = record.cells.filter((cell: { verified: boolean }) => cell.verified !== true);
    expect(wrong).toEqual([]);
  });

  it('answers bad use with exit code 2 and nothing on stdout', () => {
    const { code, stdout, stderr } = bitassay('try', 'no-such-file.log', '--json');
    expect({ code, stdout }).toEqual({ code: 2, stdout: '' });
    expect(stderr).toContain('no-such-file.log');
  });

  it('is a library that loads by its name', () => {
    writeFileSync(
      join(consumer, 'load.js'),
      "import * as library from 'bitassay';\nconsole.log(JSON.stringify(Object.keys(library)));\n",
    );
    const names = JSON.parse(mustRun(process.execPath, ['load.js'], consumer));
    expect(names.length).toBeGreaterThan(0);
  });

  it('has types that a strict caller can compile against', () => {
    // The second import must be refused: were the types missing, everything would be allowed.
    writeFileSync(
      join(consumer, 'typed.ts'),
      [
        "import * as library from 'bitassay';",
        '// @ts-expect-error: there is no such name',
        "import { noSuchName } from 'bitassay';",
        'export const names: (keyof typeof library)[] = [];',
        'export { noSuchName };',
      ].join('\n'),
    );
    const compiler = join(root, 'node_modules', 'typescript', 'bin', 'tsc');
    const settings = ['--noEmit', '--strict', '--module', 'nodenext', '--target', 'es2023'];
    mustRun(process.execPath, [compiler, ...settings, '--skipLibCheck', 'typed.ts'], consumer);
  });
});
