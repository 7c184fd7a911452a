import { mkdir, mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { CorpusSpec } from '../../src/corpus/corpus.ts';
import { placeOfSymbol } from '../../src/corpus/corpus.ts';
import {
  checkIntake,
  loadCorpus,
  loadRawCorpus,
  loadSplitCorpus,
  USUAL_INTAKE_LIMITS,
} from '../../src/corpus/intake.ts';
import { NotYetError } from '../../src/errors/errors.ts';

let folder: string;

beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'bitassay-intake-'));
  await mkdir(join(folder, 'logs'));
  await writeFile(join(folder, 'logs/b.log'), 'door open\ndoor shut\n');
  await writeFile(join(folder, 'logs/a.log'), 'défaut\n\nalarm');
  await writeFile(join(folder, 'logs/empty.txt'), '');
  await writeFile(join(folder, 'abc.bin'), 'abc');
  await writeFile(join(folder, '[x].bin'), 'brackets');
  await writeFile(join(folder, 'newlines.log'), '\n\n');
  await writeFile(join(folder, 'header.csv'), 'time,temperature\n');
  await writeFile(join(folder, 'p.csv'), 'time,temperature\n1,-18.2\n2,-17.9\n3,-18.0\n4,-18.1\n');
  await writeFile(join(folder, 'q.csv'), 'temperature,door\n-18.0,open\n-17.0,shut\n');
  await writeFile(join(folder, 'ragged.bin'), Buffer.alloc(50));
});
afterAll(() => rm(folder, { recursive: true }));

const spec = (files: string | string[], more: Partial<CorpusSpec> = {}): CorpusSpec => ({
  name: 'demo',
  files: [files].flat(),
  symbols: 'bytes',
  messages: 'whole',
  ...more,
});

const load = (files: string | string[], more?: Partial<CorpusSpec>) =>
  loadCorpus(spec(files, more), folder);

describe('loadCorpus', () => {
  // FIPS 180-2, appendix B.1: SHA-256 of "abc".
  test('hashes and counts a file', async () => {
    const sha256 = 'ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad';
    const corpus = await load('abc.bin');
    expect(corpus.files).toEqual([
      { path: 'abc.bin', sha256, byteCount: 3, messageCount: 1, symbolCount: 3 },
    ]);
    expect(corpus).toMatchObject({ sha256, sourceBytes: 3, lengths: 'sent', symbolsAs: 'bytes' });
    expect(corpus.alphabet).toEqual({ kind: 'natural' });
    expect(corpus.sequence).toEqual({
      alphabetSize: 256,
      symbols: Uint8Array.of(97, 98, 99),
      messageEnds: Uint32Array.of(3),
    });
  });

  test('joins the files of a pattern in the order of their names, each once', async () => {
    const corpus = await load(['logs/*.log', 'logs/b.log', 'abc.bin'], { messages: 'lines' });
    expect(corpus.files.map((f) => [f.path, f.messageCount, f.symbolCount])).toEqual([
      ['logs/a.log', 3, 12],
      ['logs/b.log', 2, 18],
      ['abc.bin', 1, 3],
    ]);
    expect([...corpus.fileEnds]).toEqual([3, 5, 6]);
    expect([...corpus.sequence.messageEnds]).toEqual([7, 7, 12, 21, 30, 33]);
    expect(Buffer.from(corpus.sequence.symbols).toString()).toBe(
      'défautalarmdoor opendoor shutabc',
    );
    const { createHash } = await import('node:crypto');
    const joined = 'défaut\n\nalarmdoor open\ndoor shut\nabc';
    expect(corpus.sha256).toBe(createHash('sha256').update(joined).digest('hex'));
  });

  test('takes a path that exists as it stands, whatever it holds', async () => {
    expect((await load('[x].bin')).sourceBytes).toBe(8);
  });

  test('finds the alphabet of code points in data', async () => {
    const corpus = await load('logs/a.log', { symbols: 'codepoints', messages: 'lines' });
    const values = [...new Set('défautalarm')]
      .map((c) => c.codePointAt(0) ?? 0)
      .sort((a, b) => a - b);
    expect(corpus.alphabet).toEqual({
      kind: 'map',
      foundOn: 'all',
      map: { kind: 'code-points', values: Uint32Array.from(values) },
    });
    expect(corpus.sequence.alphabetSize).toBe(values.length);
    const text = String.fromCodePoint(...[...corpus.sequence.symbols].map((id) => values[id]));
    expect(text).toBe('défautalarm');
  });

  test('quantises a column of several files over one range', async () => {
    const more = { symbols: 'csv:temperature', messages: 'every=3', step: 0.1 };
    const corpus = await load(['p.csv', 'q.csv'], more);
    expect(corpus.alphabet).toMatchObject({ map: { kind: 'range', low: -182, size: 13 } });
    expect([...corpus.sequence.symbols]).toEqual([0, 3, 2, 1, 2, 12]);
    expect([...corpus.sequence.messageEnds]).toEqual([3, 4, 6]);
    expect([...corpus.fileEnds]).toEqual([2, 3]);
    expect(corpus.lengths).toBe('link');
  });

  test('takes rows of a table as units to fill messages with', async () => {
    const more = { symbols: 'csv:temperature', messages: 'fill=8,unit=row', step: 0.1 };
    const corpus = await load(['p.csv', 'q.csv'], more);
    expect([...corpus.sequence.symbols]).toEqual([0, 3, 2, 1, 2, 12]);
    expect([...corpus.sequence.messageEnds]).toEqual([1, 2, 3, 4, 5, 6]);
    expect([...corpus.fileEnds]).toEqual([4, 6]);
    expect(corpus.fill).toEqual({ bytes: 8, unitSymbols: 1 });
    expect(corpus.lengths).toBe('link');
  });

  test('numbers the distinct texts of a column across files', async () => {
    const corpus = await load(['p.csv', 'q.csv'], { symbols: 'csv:temperature' });
    const texts = ['-17.0', '-17.9', '-18.0', '-18.1', '-18.2'];
    expect(corpus.alphabet).toMatchObject({ map: { kind: 'texts', values: texts } });
    expect([...corpus.sequence.symbols].map((id) => texts[id])).toEqual([
      '-18.2',
      '-17.9',
      '-18.0',
      '-18.1',
      '-18.0',
      '-17.0',
    ]);
  });

  test('takes values as they stand under a given alphabet', async () => {
    const corpus = await load('p.csv', { symbols: 'csv:time', alphabet: 5 });
    expect(corpus.alphabet).toEqual({ kind: 'given' });
    expect(corpus.sequence).toMatchObject({ alphabetSize: 5, symbols: Uint8Array.of(1, 2, 3, 4) });
    expect((await load('abc.bin', { alphabet: 100 })).sequence.alphabetSize).toBe(100);
    const text = { symbols: 'codepoints', alphabet: 0x110000 };
    expect((await load('logs/a.log', text)).sequence.symbols[1]).toBe(0xe9);
  });

  test('messages cover exactly the symbols of every file', async () => {
    const contents = fc.array(fc.uint8Array({ minLength: 1, maxLength: 12 }), {
      minLength: 1,
      maxLength: 3,
    });
    const symbols = fc.constantFrom('bytes', 'bits', 'nibbles');
    const messages = fc.constantFrom('whole', 'every=3', 'records=2', 'lines');
    let run = 0;
    await fc.assert(
      fc.asyncProperty(contents, symbols, messages, async (parts, taker, rule) => {
        const names = parts.map((_, i) => `run-${run}-${i}.bin`);
        run++;
        await Promise.all(parts.map((part, i) => writeFile(join(folder, names[i]), part)));
        const record = { bytes: 1, fields: [] };
        const more = { symbols: taker, messages: rule, record };
        const raw = await loadRawCorpus(spec(names, more), folder).catch(() => undefined);
        const perByte = { bytes: 1, nibbles: 2, bits: 8 }[taker] ?? 0;
        const kept = parts.map((p) => (rule === 'lines' ? p.filter((b) => b !== 10) : p));
        const total = kept.reduce((sum, p) => sum + p.length * perByte, 0);
        if (raw === undefined) {
          expect(total).toBe(0);
          return;
        }
        expect(raw.messageEnds.at(-1)).toBe(total);
        expect(raw.files.map((f) => f.symbolCount)).toEqual(kept.map((p) => p.length * perByte));
        expect(raw.fileEnds.at(-1)).toBe(raw.messageEnds.length);
        // No message reaches over the end of a file.
        let symbolsSoFar = 0;
        raw.files.forEach((file, i) => {
          symbolsSoFar += file.symbolCount;
          if (file.messageCount > 0)
            expect(raw.messageEnds[raw.fileEnds[i] - 1]).toBe(symbolsSoFar);
        });
      }),
      { numRuns: 60 },
    );
  });
});

describe('bad input is one paragraph', () => {
  test.each<[string, string | string[], Partial<CorpusSpec>, string, object]>([
    [
      'missing file',
      'abd.bin',
      {},
      'abd.bin: there is no such file or folder',
      { advice: 'In the same folder there is abc.bin.' },
    ],
    ['pattern without a match', 'logs/*.ndjson', {}, 'no file matches "logs/*.ndjson"', {}],
    ['empty file', 'logs/empty.txt', {}, 'logs/empty.txt is empty', {}],
    ['one empty file among others', 'logs/*', {}, 'logs/empty.txt is empty', {}],
    [
      'folder',
      'logs',
      {},
      'logs: this is a folder, not a file',
      { advice: 'To take the files in it, write logs/*.' },
    ],
    [
      'no symbols',
      'newlines.log',
      { messages: 'lines' },
      'hold no symbols',
      { file: 'newlines.log' },
    ],
    ['no rows', 'header.csv', { symbols: 'csv:time' }, 'hold no symbols', {}],
    [
      'no such column',
      'p.csv',
      { symbols: 'csv:temprature' },
      'no column named',
      { expected: 'one of the columns time, temperature' },
    ],
    [
      'ragged records',
      'ragged.bin',
      { messages: 'records=8', record: { bytes: 24, fields: [] } },
      'ragged.bin is not a whole number of records',
      { got: '50 bytes: 2 records and 2 bytes more' },
    ],
    [
      'symbol outside a given alphabet',
      ['abc.bin', 'logs/b.log'],
      { messages: 'lines', alphabet: 111 },
      'outside the given alphabet',
      { file: 'logs/b.log', messageIndex: 0, symbolIndex: 1, got: '111' },
    ],
    [
      'text outside a given alphabet',
      'q.csv',
      { symbols: 'csv:door', alphabet: 9 },
      'outside the given alphabet',
      { got: '"open"', symbolIndex: 0 },
    ],
    [
      'negative step under a given alphabet',
      'p.csv',
      { symbols: 'csv:temperature', alphabet: 9, step: 1 },
      'outside the given alphabet',
      { got: '-18 steps' },
    ],
    [
      'too many steps',
      'p.csv',
      { symbols: 'csv:temperature', step: 1e-9 },
      'span too many steps',
      { key: 'step' },
    ],
    [
      'lines of a table',
      'p.csv',
      { symbols: 'csv:time', messages: 'lines' },
      'does not go with symbols: csv:time',
      { expected: 'every=N, fill=BYTES,unit=row or whole, since each row is one symbol' },
    ],
    [
      'rows of bytes',
      'abc.bin',
      { messages: 'fill=8,unit=row' },
      'does not go with symbols: bytes',
      { key: 'messages' },
    ],
    [
      'bytes of a table',
      'p.csv',
      { symbols: 'csv:time', messages: 'fill=8,unit=4' },
      'does not go with symbols: csv:time',
      { key: 'messages' },
    ],
    [
      'prefix of a table',
      'p.csv',
      { symbols: 'csv:time', messages: 'prefix=u8' },
      'does not go with',
      {},
    ],
    [
      'lines of records',
      'abc.bin',
      { symbols: 'field:a', messages: 'lines' },
      'does not go with symbols: field:a',
      {},
    ],
    [
      'field without a record',
      'abc.bin',
      { symbols: 'field:a' },
      'needs to know the record',
      { key: 'record' },
    ],
    [
      'records without a record',
      'abc.bin',
      { messages: 'records=8' },
      'needs to know the record',
      { key: 'record' },
    ],
    [
      'step of bytes',
      'abc.bin',
      { step: 2 },
      'step does not go with symbols: bytes',
      { key: 'step' },
    ],
    ['no files', [], {}, 'names no files', {}],
  ])('%s', async (_, files, more, message, where) => {
    await expect(load(files, more)).rejects.toMatchObject({
      name: 'InputError',
      message: expect.stringContaining(message),
      where,
    });
  });

  test('too large, in bytes or in symbols', async () => {
    const limits = { ...USUAL_INTAKE_LIMITS, maxBytes: 32 };
    await expect(loadRawCorpus(spec('logs/*.log'), folder, limits)).rejects.toMatchObject({
      name: 'InputError',
      where: {
        expected: 'at most 32 bytes for symbols: bytes',
        got: '34 bytes in 2 files',
        advice: expect.stringContaining('fewer files'),
      },
    });
    const few = { ...USUAL_INTAKE_LIMITS, maxSymbols: 23 };
    await expect(
      loadRawCorpus(spec('abc.bin', { symbols: 'bits' }), folder, few),
    ).rejects.toMatchObject({ where: { expected: 'at most 2 bytes for symbols: bits' } });
    const enough = { maxBytes: 3, maxSymbols: 24 };
    const raw = await loadRawCorpus(spec('abc.bin', { symbols: 'bits' }), folder, enough);
    expect(raw.files[0].symbolCount).toBe(24);
  });

  test('a type of field that is not built yet is refused before anything is read', () => {
    const record = {
      bytes: 4,
      fields: [{ name: 'position', type: 's32le', offsetBytes: 0, widthBytes: 4 }],
    };
    expect(() => checkIntake(spec('absent', { symbols: 'field:position', record }))).toThrow(
      NotYetError,
    );
  });
});

describe('loadSplitCorpus', () => {
  const inTime = { by: 'message', order: 'in_time', train: 0.5 } as const;

  test('finds the alphabet on the train part', async () => {
    await writeFile(join(folder, 'ok.log'), 'abcd\nab\nda\nc\n');
    const more = { symbols: 'codepoints', messages: 'lines' };
    const { corpus, parts } = await loadSplitCorpus(spec('ok.log', more), folder, inTime);
    expect(corpus.alphabet).toMatchObject({ foundOn: 'train' });
    expect([...parts.train.symbols]).toEqual([0, 1, 2, 3, 0, 1]);
    expect([...parts.test.symbols]).toEqual([3, 0, 2]);
  });

  test('a test symbol that train lacks is named with its place', async () => {
    await writeFile(join(folder, 'x.log'), 'abc\nab\n');
    await writeFile(join(folder, 'y.log'), 'a\nbad\n');
    const more = { symbols: 'codepoints', messages: 'lines' };
    await expect(
      loadSplitCorpus(spec(['x.log', 'y.log'], more), folder, inTime),
    ).rejects.toMatchObject({
      name: 'InputError',
      message: expect.stringContaining('outside the alphabet that its train part shows'),
      where: {
        file: 'y.log',
        messageIndex: 1,
        symbolIndex: 2,
        expected: 'one of the 3 symbols of the train part',
        got: 'U+0064 "d"',
        advice: expect.stringMatching(/alphabet: N.*order: random.*larger share/),
      },
    });
  });

  test('a number below the range of train, and a text that train lacks', async () => {
    const column = { symbols: 'csv:temperature', messages: 'every=1' };
    await expect(
      loadSplitCorpus(spec('q.csv', { ...column, step: 1 }), folder, inTime),
    ).rejects.toMatchObject({ where: { expected: '-18 to -18 steps', got: '-17 steps' } });
    await expect(loadSplitCorpus(spec('q.csv', column), folder, inTime)).rejects.toMatchObject({
      where: { got: '"-17.0"', advice: expect.not.stringContaining('alphabet: N') },
    });
  });
});

test('placeOfSymbol skips empty messages and files without messages', () => {
  const files = ['a', 'b', 'c'].map((path) => ({
    path,
    sha256: '',
    byteCount: 1,
    messageCount: 0,
    symbolCount: 0,
  }));
  const raw = {
    files,
    fileEnds: Uint32Array.of(1, 1, 4),
    messageEnds: Uint32Array.of(2, 2, 2, 5),
  };
  expect(placeOfSymbol(raw, 1)).toEqual({ file: 'a', messageIndex: 0, symbolIndex: 1 });
  expect(placeOfSymbol(raw, 2)).toEqual({ file: 'c', messageIndex: 2, symbolIndex: 0 });
  expect(placeOfSymbol(raw, 4)).toEqual({ file: 'c', messageIndex: 2, symbolIndex: 2 });
});
