/** `--memory` and `--sample` as a user meets them: the built program, real files, exit codes and what is said. */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { runRecordSchema } from '../../src/harness/run-record.ts';

const main = fileURLToPath(new URL('../../dist/cli/main.js', import.meta.url));

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-memory-'));
  let text = '';
  for (let i = 0; text.length < 4e6; i++)
    text += `unit ${4700 + (i % 9)} supply ${(i * 7919) % 911} report ${i % 100}\n`;
  writeFileSync(join(folder, 'year.log'), text);
  writeFileSync(join(folder, 'day.log'), text.slice(0, 4000));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function bitassay(...args: string[]): { code: number | null; out: string; err: string } {
  const { status, stdout, stderr } = spawnSync(process.execPath, [main, ...args], {
    cwd: folder,
    encoding: 'utf8',
    maxBuffer: 1 << 26,
    // Coded bytes lie here meanwhile: none may stay.
    env: { ...process.env, TMPDIR: folder },
  });
  return { code: status, out: stdout, err: stderr };
}

const leftFolders = () => readdirSync(folder).filter((name) => name.startsWith('bitassay-'));

describe('--memory', () => {
  test('try reads what does not fit in pieces, says so, and names what cannot be', () => {
    const { code, out } = bitassay(
      ...['try', 'year.log', '--memory', '256MB', '--coder', 'huffman', '--coder', 'brotli'],
    );
    expect(code).toBe(3);
    expect(out).toContain('Read in pieces to stay within 256MB');
    expect(out).toMatch(/brotli.*no rate\. brotli needs all data at once/s);
    expect(out).toContain('--messages every=4096 --memory 256MB');
    expect(leftFolders()).toEqual([]);
  });

  test('entropy counts orders 0 to 2', () => {
    const { code, out } = bitassay('entropy', 'year.log', '--memory', '256MB', '--json');
    expect(code).toBe(0);
    const { corpora, entropy } = JSON.parse(out);
    expect(corpora[0].in_pieces).toBe(true);
    expect(entropy[0].orders).toHaveLength(3);
  });

  test('run takes what fits as a whole and the rest in pieces, into one record', () => {
    writeFileSync(
      join(folder, 'plan.yaml'),
      `plan: 1
corpora:
  year: {files: year.log, symbols: bytes, messages: every=4096}
  day: {files: day.log, symbols: bytes, messages: lines}
candidates: [huffman]
tables: [shipped, sent]
timing: {repeats: 0}
memory: 256MB
`,
    );
    const { code, err } = bitassay('run', 'plan.yaml', '-o', 'out.run');
    expect(err).toContain('record in');
    expect(code).toBe(0);
    const text = readFileSync(join(folder, 'out.run', 'run.json'), 'utf8');
    const record = runRecordSchema.parse(JSON.parse(text));
    expect(record.plan.memory_bytes).toBe(256e6);
    expect(record.corpora.map(({ name, in_pieces }) => [name, in_pieces])).toEqual([
      ['day', undefined],
      ['year', true],
    ]);
    expect(record.cells.map(({ id, verified }) => [id, verified])).toEqual([
      ['day/huffman@shipped/message', true],
      ['day/huffman@sent/message', true],
      ['year/huffman@shipped/message', true],
      ['year/huffman@sent/message', true],
    ]);
    const listed = bitassay('run', 'plan.yaml', '--cells');
    expect(listed.out).toContain('year/huffman@sent/message');
    expect(listed.out).toContain('The 2 that read data in pieces are not in it.');
  });

  test.each([
    ['12 bananas', 'a size such as 512MB'],
    ['100MB', 'at least 256MB'],
  ])('refuses %s', (size, expected) => {
    const { code, err } = bitassay('try', 'year.log', '--memory', size);
    expect(code).toBe(2);
    expect(err).toContain(expected);
  });

  test('says what would be needed where symbols cannot be read in pieces', () => {
    const { code, err } = bitassay(
      ...['entropy', 'year.log', '--symbols', 'codepoints', '--memory', '256MB'],
    );
    expect(code).toBe(2);
    expect(err).toContain('does not fit the memory allowed');
    expect(err).toMatch(/expected: at least \d+MB/);
  });
});

describe('--sample', () => {
  test('says how much was taken, and what its figures are not', () => {
    const { code, out } = bitassay(
      ...['try', 'year.log', '--sample', 'every=40,block=10kB', '--coder', 'huffman'],
    );
    expect(code).toBe(0);
    expect(out).toContain('A sample: 11 of 401 blocks, 2.5 % of the bytes.');
    expect(out.replace(/\s+/g, ' ')).toContain("such rates are the sample's");
  });

  test('overrides the one of a plan', () => {
    writeFileSync(
      join(folder, 'sampled.yaml'),
      `plan: 1
corpora:
  year: {files: year.log, symbols: bytes, messages: lines}
candidates: [huffman]
tables: [sent]
timing: {repeats: 0}
sample: {every: 1000, block: 2kB}
`,
    );
    const blocks = (...more: string[]) => {
      const { code } = bitassay('run', 'sampled.yaml', '-o', 'sampled.run', ...more);
      expect(code).toBe(0);
      const text = readFileSync(join(folder, 'sampled.run', 'run.json'), 'utf8');
      return runRecordSchema.parse(JSON.parse(text)).corpora[0].sample?.blocks;
    };
    expect(blocks()).toBe(3);
    expect(blocks('--sample', 'reservoir=8kB,block=2kB,seed=2')).toBe(4);
  });

  test('refuses a key that there is not', () => {
    const { code, err } = bitassay('entropy', 'year.log', '--sample', 'evry=3');
    expect(code).toBe(2);
    expect(err).toContain('Did you mean every=?');
  });
});
