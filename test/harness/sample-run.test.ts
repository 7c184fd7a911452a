import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import { parseSampleRule } from '../../src/corpus/sample-rule.ts';
import { intervalUnits } from '../../src/entropy/interval-units.ts';
import { entropyReport } from '../../src/harness/entropy-report.ts';
import { loadCorpusData } from '../../src/harness/load-corpus-data.ts';
import { runAll } from '../../src/harness/run-all.ts';
import { runRecordSchema } from '../../src/harness/run-record.ts';
import { countContexts } from '../../src/models/context-counts.ts';

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-sampled-'));
  const bytes = Uint8Array.from({ length: 40_000 }, (_, i) => (Math.imul(i, i + 3) >>> 7) & 15);
  writeFileSync(join(folder, 'tracker.bin'), bytes);
});
afterAll(() => rmSync(folder, { recursive: true }));

const load = (sample: string, messages = 'every=100') =>
  loadCorpusData(
    {
      name: 'tracker',
      files: ['tracker.bin'],
      symbols: 'bytes',
      messages,
      sample: parseSampleRule(sample),
    },
    folder,
    undefined,
  );

test('a cell that would run on over the gaps fails and says why; one block has no gap', async () => {
  const run = async (sample: string) => {
    const { record } = await runAll({
      title: 'sample',
      corpora: [await load(sample)],
      candidates: [parseCandidate('arith:order=1')],
      policies: ['learned'],
      resets: ['message', 'file', 'never', 'message*3'],
      align: 8,
      split: 'none',
    });
    return runRecordSchema.parse(record);
  };
  const many = await run('every=2,block=1kB');
  expect(many.cells.map(({ reset, verified }) => [reset, verified])).toEqual([
    ['message', true],
    ['file', true],
    ['never', false],
    ['message*3', false],
  ]);
  expect(many.cells[2].failure).toContain('runs on over the gaps of a sample');
  // Blocks begin at 0, 2000, 4000 …, and hold ten messages of 100 each.
  expect(many.corpora[0].sample).toEqual({
    blocks: 20,
    of_blocks: 40,
    block_bytes: 1000,
    bytes: 20_000,
    of_bytes: 40_000,
  });
  expect(many.cells[0].files).toHaveLength(20);
  expect((await run('every=2,block=30kB')).cells.every((cell) => cell.verified)).toBe(true);
});

test('no context runs on from one block to the next, and intervals resample blocks', async () => {
  const corpus = await load('reservoir=20kB,block=1kB,seed=5');
  const { entropy, corpora } = await entropyReport([corpus], {
    upto: 2,
    rough: true,
    all: false,
    difference: 0.01,
  });
  expect(corpora[0].sample).toMatchObject({ blocks: 20, seed: 5 });
  const running = entropy.find((e) => e.contexts === 'running')!;
  running.orders.forEach((order, k) => {
    expect(order.positions).toBe(20 * (1000 - k));
    expect(order.interval_unit).toBe('20 blocks of the sample');
    expect(order.interval_trusted).toBe(false);
  });
});

test('breaks count as the ends of messages do', () => {
  const symbols = Uint8Array.from({ length: 300 }, (_, i) => Math.imul(i, 7) % 5);
  const ends = Uint32Array.of(10, 10, 150, 300);
  const options = { upto: 3, blocks: 4 };
  const broken = countContexts(
    { alphabetSize: 5, symbols, messageEnds: Uint32Array.of(300) },
    { ...options, contexts: 'running', breaks: ends },
  );
  const messages = countContexts(
    { alphabetSize: 5, symbols, messageEnds: ends },
    { ...options, contexts: 'message' },
  );
  expect(broken).toEqual(messages);
});

test('a sample resamples its blocks however few they are, files only from 30 on', () => {
  const sequence = { symbols: { length: 4000 }, messageEnds: Uint32Array.of(4000) };
  const ends = Uint32Array.of(1000, 2000, 2000, 4000);
  const { text, independent } = intervalUnits(sequence, ends, true);
  expect([text, independent]).toEqual(['3 blocks of the sample', true]);
  expect(intervalUnits(sequence, ends).text).toBe('256 blocks of positions');
  const many = Uint32Array.from({ length: 1000 }, (_, i) => 4 * (i + 1));
  const grouped = intervalUnits(sequence, many, true);
  expect(grouped.text).toContain('groups of blocks of the sample');
  expect(grouped.independent).toBe(false);
});
