import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { parseCandidates } from '../../src/coders/candidate.ts';
import { compareRun } from '../../src/compare/compare-run.ts';
import { decideSplit } from '../../src/corpus/decide-split.ts';
import { loadCorpus } from '../../src/corpus/intake.ts';
import { parseMessageRule } from '../../src/corpus/messages.ts';
import { parsePlan } from '../../src/corpus/plan.ts';
import { InputError, NotYetError } from '../../src/errors/errors.ts';
import { listCells } from '../../src/harness/cells.ts';
import { requestOf } from '../../src/harness/plan-request.ts';
import { type RunResult, runAll } from '../../src/harness/run-all.ts';
import { runRecordSchema } from '../../src/harness/run-record.ts';
import { runScreen } from '../../src/report/run-screen.ts';

const BUDGET_BITS = 192 * 8;
const RECORD = `{bytes: 24, fields: {dt: u16le@0, set_point: s16le@2, supply: s16le@4, return_air: s16le@6,
      humidity: u16le@8, flags: u8@10, battery: u8@11, d_lat: s16le@12, d_lon: s16le@14, probe_1: s16le@16,
      probe_2: s16le@18, sequence: u16le@20, starts: u8@22, signal: u8@23}}`;
const PLAN = `
plan: 1
corpora:
  telemetry:
    files: telemetry.bin
    record: ${RECORD}
    symbols: bytes
    messages: fill=192,unit=24
split: {by: unit}
candidates: [fixed, huffman, "block-huffman:n=2", "arith:order=1..2", "fields:auto", deflate]
tables: [shipped, learned, primed]
reset: [message, never]
`;

describe('the demo’s telemetry in packets', () => {
  let result: RunResult;
  beforeAll(async () => {
    const { timing: _, ...request } = await requestOf(parsePlan(PLAN, 'corpora-demo/plan.yaml'));
    result = await runAll(request);
  }, 120_000);

  it('carries by fields at least twice the records a packet of the best byte-wise candidate', () => {
    const { cells } = result.record;
    const mean = (id: string) => cells.find((c) => c.id === id)!.units_per_message!.mean;
    const bytewise = cells.filter((c) => c.coder !== 'fields' && !c.reference);
    expect(bytewise.length).toBe(9);
    const best = Math.max(...bytewise.map((c) => c.units_per_message!.mean));
    expect(mean('telemetry/fields:auto@shipped/message')).toBeGreaterThanOrEqual(2 * best);
  });

  it('says of each cell how full its messages are', () => {
    expect(runRecordSchema.parse(result.record)).toEqual(result.record);
    for (const cell of result.record.cells) {
      expect(cell.failure).toBeUndefined();
      expect(cell.unit_count).toBe(5000);
      const { mean, min } = cell.units_per_message!;
      expect(mean).toBeCloseTo(5000 / cell.message_count!, 12);
      expect(min).toBeGreaterThanOrEqual(1);
      expect(min).toBeLessThanOrEqual(Math.ceil(mean));
      expect(cell.message_bytes!.max).toBeLessThanOrEqual(192);
    }
    // 7 units of 24 bytes and a count of 8 bits or less are 170 bytes, an eighth would make 194.
    const fixed = result.record.cells[0];
    expect(fixed.units_per_message!.min).toBe(7);
    expect(fixed.message_count).toBe(Math.ceil(5000 / 7));
  });

  it('spreads the bits of a message over its units', () => {
    for (const cell of result.record.cells) {
      const { bits, symbols } = result.messages.get(cell.id)!;
      expect(bits.length).toBe(5000);
      expect(symbols.every((count) => count === 24)).toBe(true);
      const sum = bits.reduce((a, b) => a + b, 0);
      expect(sum).toBeCloseTo(cell.carried_bits!, 3);
      for (const unit of bits) expect(unit).toBeLessThanOrEqual(BUDGET_BITS);
      expect(cell.files!.map((f) => f.coded_bytes)).toEqual([cell.coded_bytes]);
    }
    const { comparisons } = compareRun(result.record, result.messages);
    expect(comparisons.length).toBeGreaterThan(5);
    const fewest = Math.min(...result.record.cells.map((c) => c.message_count!));
    for (const { unit, units } of comparisons) {
      expect(unit).toBe('blocks of units');
      expect(units).toBeLessThanOrEqual(fewest / 2);
    }
  });

  it('holds all cells against contexts that run on over units', () => {
    expect(result.record.entropy.map((e) => e.contexts)).toEqual(['running']);
    for (const { account } of result.record.cells) expect(account!.opening ?? 0).toBe(0);
  });

  it('leaves out what does not decode alone, and says so', () => {
    // learned and primed under never: arith twice, fields:auto (primed only).
    expect(result.record.not_filled).toBe(5);
    for (const columns of [80, 100]) {
      const compared = compareRun(result.record, result.messages);
      const screen = runScreen(result.record, { columns, compared, next: 'nothing' });
      const words = screen.replace(/\s+/g, ' ');
      expect(words).toContain('5 combinations of tables and reset gave no cell: messages can be');
      expect(words).toContain('A flipped bit can spoil a whole message and all its units');
      expect(words).toContain('units/');
      expect(words).toContain('120 000 symbols in 5 000 units');
      expect(words).toMatch(/Cells share a rank .* over \d+ blocks of units, 95 %/);
      expect(screen).toMatch(/^ {2}candidate +tables +rank +byte/m);
      for (const line of screen.split('\n')) expect([...line].length).toBeLessThanOrEqual(columns);
    }
  });
});

describe('cells of filled corpora', () => {
  it('exist under reset message and for shipped tables', () => {
    const { cells, notFilled } = listCells(
      ['filled', 'plain'],
      parseCandidates('arith:order=0'),
      ['shipped', 'sent', 'learned'],
      ['message', 'file', 'never', 'message*8'],
      { filled: new Set(['filled']) },
    );
    expect(cells.filter((c) => c.corpus === 'filled').map((c) => c.id)).toEqual([
      'filled/arith:order=0@shipped/message',
      'filled/arith:order=0@sent/message',
      'filled/arith:order=0@learned/message',
    ]);
    expect(cells.filter((c) => c.corpus === 'plain').length).toBe(1 + 2 * 4);
    expect(notFilled).toBe(2 * 3);
  });

  it('are missed by a candidate that has none', () => {
    const none = () =>
      listCells(['a'], parseCandidates('arith:order=0'), ['learned'], ['never'], {
        filled: new Set(['a']),
      });
    expect(none).toThrow(InputError);
    try {
      none();
    } catch (error) {
      expect((error as InputError).where.advice).toContain('reset message or shipped');
    }
  });
});

describe('the rule fill', () => {
  it.each([
    ['fill=192,unit=24', { kind: 'fill', bytes: 192, unit: 24 }],
    [' fill=1, unit=line', { kind: 'fill', bytes: 1, unit: 'line' }],
  ])('reads %s', (text, rule) => {
    expect(parseMessageRule(text)).toEqual(rule);
  });

  it.each([
    'fill',
    'fill=192',
    'fill=0,unit=1',
    'fill=8,unit=0',
    'fill=8,unit=word',
    'fill=8,unit=1.5',
    'fill=99999999999,unit=1',
  ])('refuses %s', (text) => {
    expect(() => parseMessageRule(text)).toThrow(InputError);
    expect(() => parseMessageRule(text)).not.toThrow(NotYetError);
  });

  it('goes with split by: unit, which other messages do not have', () => {
    expect(parsePlan(PLAN, 'plan.yaml').split.by).toBe('unit');
    const other = PLAN.replace('fill=192,unit=24', 'records=8');
    expect(() => parsePlan(other, 'plan.yaml')).toThrow(/telemetry has no units/);
  });
});

describe('corpora of units', () => {
  let folder: string;
  beforeAll(async () => {
    folder = await mkdtemp(join(tmpdir(), 'bitassay-fill-'));
    await writeFile(join(folder, 'six.bin'), Uint8Array.of(1, 2, 3, 4, 5, 6));
    await writeFile(join(folder, 'lines.txt'), 'ab\n\nc');
  });
  afterAll(() => rm(folder, { recursive: true }));

  const load = (files: string, symbols: string, messages: string) =>
    loadCorpus({ name: 'c', files: [files], symbols, messages }, folder);

  it.each([
    ['bytes', 2, [2, 4, 6], 2],
    ['nibbles', 3, [6, 12], 6],
    ['bits', 6, [48], 48],
    ['u16be', 2, [1, 2, 3], 1],
  ])('of fixed size: %s, unit=%i', async (symbols, unit, ends, unitSymbols) => {
    const corpus = await load('six.bin', symbols, `fill=9,unit=${unit}`);
    expect([...corpus.sequence.messageEnds]).toEqual(ends);
    expect(corpus.fill).toEqual({ bytes: 9, unitSymbols });
    expect(corpus.lengths).toBe('link');
  });

  it('of lines, the newline a symbol of its line', async () => {
    const corpus = await load('lines.txt', 'bytes', 'fill=9,unit=line');
    expect([...corpus.sequence.messageEnds]).toEqual([3, 4, 5]);
    expect(Buffer.from(corpus.sequence.symbols).toString()).toBe('ab\n\nc');
    expect(corpus.fill).toEqual({ bytes: 9 });
  });

  it('name a ragged tail, and units that are no whole symbols', async () => {
    await expect(load('six.bin', 'bytes', 'fill=9,unit=4')).rejects.toThrow(
      'six.bin is not a whole number of units',
    );
    const ragged = await load('six.bin', 'bytes', 'fill=9,unit=4').catch((error) => error.where);
    expect(ragged.got).toBe('6 bytes: 1 units and 2 bytes more');
    await expect(load('six.bin', 'u16le', 'fill=9,unit=3')).rejects.toThrow(InputError);
    await expect(load('lines.txt', 'codepoints', 'fill=9,unit=5')).rejects.toThrow(InputError);
  });

  it('are never cut by a split by block', () => {
    const messageEnds = Uint32Array.from({ length: 50 }, (_, i) => 7 * (i + 1));
    const shape = { name: 'c', messageEnds, fileEnds: Uint32Array.of(50), fill: { bytes: 9 } };
    for (const order of ['in_time', 'random'] as const) {
      const { train, test } = decideSplit(shape, { by: 'block', order, train: 0.5 });
      expect(train.starts.length + test.starts.length).toBe(50);
      for (const side of [train, test]) {
        side.starts.forEach((start, i) => {
          expect(start % 7).toBe(0);
          expect(side.ends[i]).toBe(start + 7);
        });
      }
    }
  });
});
