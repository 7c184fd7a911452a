/** `bitassay export` as a user runs it: files, proof, refusals. */
import { execFileSync, spawnSync } from 'node:child_process';
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { buildProgram } from '../../src/cli/program.ts';
import { parseExport } from '../../src/export/json-file.ts';

let folder = '';
let log = '';

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-export-cli-'));
  log = join(folder, 'door.log');
  const lines = Array.from(
    { length: 300 },
    (_, i) => `unit ${i % 9} supply ${-18 + ((i * 7) % 5)}\n`,
  );
  writeFileSync(log, lines.join(''));
});

afterAll(() => rmSync(folder, { recursive: true, force: true }));

/** What a command of the program writes to standard output. */
async function say(...args: string[]): Promise<string> {
  const written: string[] = [];
  const real = process.stdout.write;
  process.stdout.write = ((text: string, done?: unknown) => {
    written.push(text);
    if (typeof done === 'function') done();
    return true;
  }) as typeof process.stdout.write;
  try {
    await buildProgram().parseAsync(['node', 'bitassay', ...args]);
  } finally {
    process.stdout.write = real;
  }
  return written.join('');
}

const run = (...args: string[]): Promise<string> => say('export', ...args);

describe('bitassay export', () => {
  const patience = { timeout: 120_000 };

  it(
    'writes C that builds without a word, runs its own timing, and is proven',
    patience,
    async () => {
      const to = join(folder, 'c');
      const said = await run(
        '--coder',
        'huffman',
        '--from',
        log,
        '--messages',
        'lines',
        '-o',
        to,
        '--prove',
        '--name',
        'door',
      );
      expect(readdirSync(to).sort()).toEqual([
        'door.h',
        'door.json',
        'door_decode.c',
        'door_encode.c',
        'selftime.c',
      ]);
      expect(said).toMatch(/C99, gcc with sanitizers: 10 300 messages/);
      expect(said).toMatch(/decoder here: \d+ bytes of code/);
      const strict = [
        '-std=c99',
        '-Wall',
        '-Wextra',
        '-Wconversion',
        '-Wshadow',
        '-Werror',
        '-pedantic',
      ];
      execFileSync(
        'gcc',
        [
          ...strict,
          '-DROUNDS=50u',
          '-o',
          'selftime',
          'selftime.c',
          'door_encode.c',
          'door_decode.c',
        ],
        { cwd: to },
      );
      const timed = spawnSync(join(to, 'selftime'), { encoding: 'utf8' });
      expect(timed.status).toBe(0);
      expect(timed.stdout).toMatch(
        /^encoder: \d+ ticks for \d+ symbols\ndecoder: \d+ ticks for \d+ symbols\n$/,
      );
      const header = readFileSync(join(to, 'door.h'), 'utf8');
      const { provenance } = parseExport(JSON.parse(readFileSync(join(to, 'door.json'), 'utf8')));
      expect(header).toContain(`tables ${provenance.table_id}`);
      expect(header).toContain(provenance.train_sha256);
      expect(header).toContain('lengths still tell');
    },
  );

  it(
    'keeps the tables, and their id, when nothing changes, and changes the id with the tables',
    patience,
    async () => {
      const idOf = async (from: string) => {
        await run(
          '--coder',
          'arith:order=1,range=32',
          '--from',
          from,
          '--to',
          'json',
          '-o',
          join(folder, 'j'),
          '--name',
          'j',
        );
        return parseExport(JSON.parse(readFileSync(join(folder, 'j', 'j.json'), 'utf8'))).provenance
          .table_id;
      };
      const other = join(folder, 'other.log');
      writeFileSync(other, 'unit 3 supply -12\n'.repeat(40));
      expect(await idOf(log)).toBe(await idOf(log));
      expect(await idOf(log)).not.toBe(await idOf(other));
    },
  );

  it(
    'writes TypeScript that a strict compiler takes and that gives back what it coded',
    patience,
    async () => {
      const to = join(folder, 'ts');
      await run(
        '--coder',
        'block-huffman:n=2',
        '--from',
        log,
        '--messages',
        'lines',
        '--to',
        'ts',
        '-o',
        to,
        '--name',
        'door',
        '--prove',
      );
      writeFileSync(join(to, 'package.json'), '{"type": "module"}');
      const compiler = new URL('../../node_modules/typescript/bin/tsc', import.meta.url).pathname;
      execFileSync(
        process.execPath,
        [
          compiler,
          '--strict',
          '--target',
          'es2023',
          '--module',
          'nodenext',
          '--noUnusedLocals',
          'door.ts',
        ],
        { cwd: to },
      );
      const { encode, decode } = await import(join(to, 'door.js'));
      const message = new TextEncoder().encode('unit 4 supply -15');
      const coded: Uint8Array = encode(message);
      expect([...decode(coded, 100).symbols]).toEqual([...message]);
      expect(coded.length).toBeLessThan(message.length);
      expect(() => decode(coded.subarray(0, 2), 100)).toThrow(RangeError);
    },
  );

  it(
    'takes a cell of a run, and says of one without exported form what there is',
    patience,
    async () => {
      const plan = join(folder, 'door.yaml');
      writeFileSync(
        plan,
        [
          'plan: 1',
          'title: Door logs',
          `corpora: { door: { files: ${JSON.stringify(log)}, symbols: bytes, messages: lines } }`,
          'split: { by: message, order: in_time, train: 0.5 }',
          'candidates: [huffman, "arith:order=1"]',
          'tables: [shipped]',
          'timing: { repeats: 1 }',
        ].join('\n'),
      );
      const to = join(folder, 'door.run');
      await say('run', plan, '-o', to);
      await say('choose', to);
      // The pick of least rate is arith, which this range keeps from being exported.
      await expect(run(to, '-o', join(folder, 'none'))).rejects.toThrow(/only range=32/);
      rmSync(join(to, 'choice.json'));
      expect(await run(to, '--to', 'json', '-o', join(folder, 'cell'))).toMatch(/^huffman, tables/);
      const said = await run(to, '--cell', 'huffman', '--to', 'json', '-o', join(folder, 'cell'));
      expect(said).toMatch(/^huffman, tables [0-9a-f]{8}: .* on the test part/);
      await expect(run(to, '--cell', 'arith', '-o', join(folder, 'none'))).rejects.toThrow(
        /door\/arith:order=1@shipped\/message cannot be exported: only range=32/,
      );
    },
  );

  it.each([
    ['neither run nor coder', [], /from a run, or from --coder/],
    ['a coder without data', ['--coder', 'huffman'], /needs data to train/],
    [
      'a coder that has no exported form',
      ['--coder', 'brotli', '--from', 'LOG'],
      /no shipped tables|no exported form/,
    ],
    ['48 bits', ['--coder', 'arith:order=1', '--from', 'LOG'], /range=32/],
    ['a high order', ['--coder', 'arith:order=3,range=32', '--from', 'LOG'], /orders up to 2/],
    ['a step around the coder', ['--coder', 'rice:after=delta', '--from', 'LOG'], /after=/],
    [
      'a name that is none',
      ['--coder', 'huffman', '--from', 'LOG', '--name', '9-lives'],
      /cannot be the name/,
    ],
    [
      'symbols that need a map',
      ['--coder', 'huffman', '--from', 'LOG', '--symbols', 'codepoints'],
      /alphabet map/,
    ],
  ])('refuses %s', async (_, args, message) => {
    const given = args.map((word) => (word === 'LOG' ? log : word));
    await expect(run(...given, '-o', join(folder, 'none'))).rejects.toThrow(message);
  });
});
