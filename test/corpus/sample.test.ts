import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { byteSizeText, parseByteSize } from '../../src/corpus/byte-size.ts';
import type { CorpusSpec } from '../../src/corpus/corpus.ts';
import { loadCorpus, loadRawCorpus } from '../../src/corpus/intake.ts';
import {
  chosenBlocks,
  parseSampleRule,
  type SampleRule,
  sampleRuleText,
} from '../../src/corpus/sample-rule.ts';
import { InputError } from '../../src/errors/errors.ts';
import { sliceMessages } from '../../src/symbols/sequence.ts';

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'bitassay-sample-'));
});
afterAll(() => rm(folder, { recursive: true }));

const specOf = (files: string[], more: Partial<CorpusSpec>): CorpusSpec => ({
  name: 'uplink',
  files,
  symbols: 'bytes',
  messages: 'whole',
  ...more,
});

/** Messages of a corpus as texts. */
async function messagesOf(spec: CorpusSpec): Promise<string[]> {
  const { sequence } = await loadCorpus(spec, folder);
  return Array.from({ length: sequence.messageEnds.length }, (_, i) =>
    sliceMessages(sequence, i, i + 1).symbols.join(),
  );
}

const everyRule = (every: number, blockBytes: number): SampleRule => ({
  kind: 'every',
  every,
  blockBytes,
});

describe('sizes', () => {
  // Powers of 1000 and 1024: ISO/IEC 80000-13 prefixes.
  test.each([
    ['512MB', 512e6],
    ['64MiB', 64 * 2 ** 20],
    ['1.5 kB', 1500],
    ['2GB', 2e9],
    ['1KiB', 1024],
    ['7B', 7],
  ])('%s', (text, bytes) => expect(parseByteSize(text)).toBe(bytes));

  test.each(['12 bananas', '512', '-1MB', 'MB', '1 mb', ''])('refuses %j', (text) =>
    expect(() => parseByteSize(text)).toThrow(InputError),
  );
});

describe('a size as it is written again', () => {
  test.each([
    [512e6, '512MB'],
    [2e9, '2GB'],
    [1500, '1500B'],
    [0, '0B'],
  ])('%d', (bytes, text) => expect(byteSizeText(bytes)).toBe(text));
});

describe('a sample rule', () => {
  test.each([
    ['every=12,block=1MB', { kind: 'every', every: 12, blockBytes: 1e6 }],
    ['every=3', { kind: 'every', every: 3, blockBytes: 1e6 }],
    [
      'reservoir=64MB, block=1MiB, seed=7',
      { kind: 'reservoir', bytes: 64e6, blockBytes: 2 ** 20, seed: 7 },
    ],
    ['reservoir=64MB', { kind: 'reservoir', bytes: 64e6, blockBytes: 1e6, seed: 1 }],
  ])('reads %s, and its own text again', (text, rule) => {
    expect(parseSampleRule(text)).toEqual(rule);
    expect(parseSampleRule(sampleRuleText(parseSampleRule(text)))).toEqual(rule);
  });

  test.each([
    ['evry=12', 'every'],
    ['every=0', 'from 1'],
    ['every=12,reservoir=1MB', 'not both'],
    ['block=1MB', 'every or reservoir'],
    ['every=2,every=3', 'once'],
    ['every=2,seed=3', 'reservoir'],
    ['reservoir=1kB,block=1MB', 'bytes or more'],
    ['every=2,block=1B', '256 to'],
    ['every=2,block=12 bananas', '512MB'],
  ])('refuses %s', (text, hint) => {
    let met: unknown;
    try {
      parseSampleRule(text);
    } catch (error) {
      met = error;
    }
    expect(met).toBeInstanceOf(InputError);
    const { expected, advice } = (met as InputError).where;
    expect(`${expected} ${advice}`).toContain(hint);
  });

  test('takes each choice of blocks equally often', () => {
    // 2 of 4 blocks: 6 choices. Over 6000 seeds each is drawn 1000 times, binomial standard deviation 29; five of them.
    const times = new Map<string, number>();
    for (let seed = 0; seed < 6000; seed++) {
      const rule: SampleRule = { kind: 'reservoir', bytes: 2000, blockBytes: 1000, seed };
      const key = chosenBlocks(rule, 4).join();
      times.set(key, (times.get(key) ?? 0) + 1);
    }
    expect(times.size).toBe(6);
    for (const count of times.values()) expect(Math.abs(count - 1000)).toBeLessThan(145);
  });

  test('takes all blocks where there are not more, and every n-th from the first', () => {
    const rule: SampleRule = { kind: 'reservoir', bytes: 9000, blockBytes: 1000, seed: 2 };
    expect(chosenBlocks(rule, 3)).toEqual([0, 1, 2]);
    expect(chosenBlocks(everyRule(3, 1000), 8)).toEqual([0, 3, 6]);
  });
});

const RULES: readonly Partial<CorpusSpec>[] = [
  { messages: 'lines' },
  { messages: 'every=10' },
  { messages: 'every=3', symbols: 'bits' },
  { messages: 'every=3', symbols: 'u16le' },
  { messages: 'records=2', record: { bytes: 3, fields: [] } },
  { messages: 'prefix=u8' },
  { messages: 'prefix=u16le' },
];

function shaped(bytes: Uint8Array, { messages }: Partial<CorpusSpec>): Uint8Array {
  if (messages?.startsWith('prefix') !== true) return bytes;
  const parts: number[] = [];
  for (let at = 0; at < bytes.length; at += 1 + (bytes[at] % 50)) {
    const body = bytes.subarray(at, at + (bytes[at] % 50));
    parts.push(body.length, ...(messages === 'prefix=u8' ? [] : [0]), ...body);
  }
  return Uint8Array.from(parts);
}

describe('the blocks of a sample', () => {
  const files = fc.array(
    fc
      .uint8Array({ minLength: 100, maxLength: 1500 })
      .map((bytes) => bytes.slice(0, bytes.length - (bytes.length % 6)))
      .map((bytes) => bytes.map((b) => (b < 20 ? 10 : b))),
    { minLength: 1, maxLength: 2 },
  );

  test('part the messages: every block taken gives all of them, two halves each of them once', async () => {
    await fc.assert(
      fc.asyncProperty(
        files,
        fc.constantFrom(...RULES),
        fc.integer({ min: 256, max: 400 }),
        async (contents, rule, blockBytes) => {
          const names = contents.map((_, i) => `s${i}.bin`);
          await Promise.all(
            contents.map((bytes, i) => writeFile(join(folder, names[i]), shaped(bytes, rule))),
          );
          const spec = specOf(names, rule);
          const all = await messagesOf(spec);
          expect(await messagesOf({ ...spec, sample: everyRule(1, blockBytes) })).toEqual(all);
          // Blocks 0, 2, 4 … hold some messages in their order, the others hold the rest.
          const even = await messagesOf({ ...spec, sample: everyRule(2, blockBytes) });
          let at = 0;
          for (const message of even) {
            while (at < all.length && all[at] !== message) at++;
            expect(at++).toBeLessThan(all.length);
          }
          const raw = await loadRawCorpus({ ...spec, sample: everyRule(2, blockBytes) }, folder);
          const sizes = contents.map((bytes) => shaped(bytes, rule).length);
          const blocks = sizes.reduce((sum, size) => sum + Math.ceil(size / blockBytes), 0);
          expect(raw.sample).toMatchObject({
            blocks: Math.ceil(blocks / 2),
            ofBlocks: blocks,
            ofBytes: sizes.reduce((a, b) => a + b, 0),
          });
          expect(raw.files.length).toBeLessThanOrEqual(Math.ceil(blocks / 2));
        },
      ),
      { numRuns: 60 },
    );
  });

  test('cut a file of one message at symbols, code points at their first byte', async () => {
    // Two bytes each: a block of 257 bytes would cut the 129th.
    await writeFile(join(folder, 'e.txt'), 'é'.repeat(400));
    for (const symbols of ['codepoints', 'u16be']) {
      const spec = specOf(['e.txt'], { symbols, sample: everyRule(2, 257) });
      const { sequence, files } = await loadCorpus(spec, folder);
      // Blocks 0 to 257 and 514 to 771, to the end of the symbol that each ends in.
      expect(files.map((f) => f.byteCount)).toEqual([258, 258]);
      expect([...sequence.messageEnds]).toEqual([129, 258]);
    }
  });

  test('name the file and the place where the file ends inside a frame', async () => {
    await writeFile(
      join(folder, 'cut.bin'),
      Buffer.concat([Buffer.alloc(600), Buffer.from([9, 1])]),
    );
    const spec = specOf(['cut.bin'], { messages: 'prefix=u8', sample: everyRule(1, 300) });
    await expect(loadCorpus(spec, folder)).rejects.toMatchObject({
      where: { file: 'cut.bin', byteOffset: 600, expected: '9 more bytes', got: '1' },
    });
  });

  test.each([
    [{ symbols: 'csv:speed' }, 'csv:speed'],
    [{ messages: 'fill=192,unit=24' }, 'fill=192'],
  ])('do not go with %j', async (more, text) => {
    const spec = specOf(['e.txt'], { ...more, sample: everyRule(2, 300) });
    await expect(loadCorpus(spec, folder)).rejects.toThrow(text);
  });

  test('are bounded by memory', async () => {
    await writeFile(join(folder, 'long.bin'), new Uint8Array(5000));
    const spec = specOf(['long.bin'], { sample: everyRule(2, 1000) });
    const limits = { maxBytes: 2999, maxSymbols: 2 ** 30 };
    await expect(loadRawCorpus(spec, folder, limits)).rejects.toThrow('too large');
    await expect(loadRawCorpus(spec, folder, { ...limits, maxBytes: 3000 })).resolves.toBeDefined();
  });
});
