import { mkdtemp, rm, utimes, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { CorpusSpec } from '../../src/corpus/corpus.ts';
import { loadCorpus } from '../../src/corpus/intake.ts';
import { openStreamedCorpus, whyNotStreamed } from '../../src/corpus/stream-source.ts';
import { InputError } from '../../src/errors/errors.ts';
import type { SymbolChunk } from '../../src/symbols/sequence.ts';

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'bitassay-stream-'));
});
afterAll(() => rm(folder, { recursive: true }));

const spec = (files: string[], more: Partial<CorpusSpec>): CorpusSpec => ({
  name: 'uplink',
  files,
  symbols: 'bytes',
  messages: 'whole',
  ...more,
});

/** All chunks joined; checks what each says of itself. */
function gather(
  chunks: Iterable<SymbolChunk>,
  expectedCounts: readonly number[],
): { symbols: number[]; ends: number[] } {
  const symbols: number[] = [];
  const ends: number[] = [];
  for (const chunk of chunks) {
    const before = symbols.length;
    symbols.push(...chunk.symbols);
    for (const end of chunk.messageEnds) ends.push(before + end);
    const isOpen = (ends.at(-1) ?? 0) < symbols.length;
    expect(chunk.openSymbolCount).toBe(isOpen ? expectedCounts[ends.length] : undefined);
  }
  return { symbols, ends };
}

const RULES: readonly (Partial<CorpusSpec> & { even?: true })[] = [
  { messages: 'whole' },
  { messages: 'lines' },
  { messages: 'every=1' },
  { messages: 'every=7' },
  { messages: 'records=2', record: { bytes: 3, fields: [] } },
  { messages: 'prefix=u8' },
  { messages: 'prefix=u16be' },
  { messages: 'prefix=u32le' },
  { messages: 'whole', symbols: 'bits' },
  { messages: 'every=3', symbols: 'bits' },
  { messages: 'lines', symbols: 'nibbles' },
  { messages: 'every=5', symbols: 'u16le', even: true },
  { messages: 'whole', symbols: 's16be', even: true },
  { messages: 'records=2', symbols: 'u16be', record: { bytes: 2, fields: [] }, even: true },
];

/** Bytes that a rule can cut. */
function shaped(bytes: Uint8Array, rule: (typeof RULES)[number]): Uint8Array {
  const { messages = '', record, even } = rule;
  if (messages.startsWith('prefix')) {
    const width = { 'prefix=u8': 1, 'prefix=u16be': 2, 'prefix=u32le': 4 }[messages]!;
    const parts: number[] = [];
    for (let at = 0; at < bytes.length; ) {
      const length = Math.min(bytes.length - at, bytes[at] % 40);
      const prefix = new Array(width).fill(0);
      prefix[messages.endsWith('le') ? 0 : width - 1] = length;
      parts.push(...prefix, ...bytes.subarray(at, at + length));
      at += Math.max(1, length);
    }
    return Uint8Array.from(parts);
  }
  const step = record?.bytes ?? (even ? 2 : 1);
  const grown = new Uint8Array(Math.max(step, Math.floor(bytes.length / step) * step)).fill(10);
  grown.set(bytes.subarray(0, grown.length));
  return grown;
}

describe('openStreamedCorpus', () => {
  test('gives what loadCorpus gives, for any chunk borders and any range of messages', async () => {
    const files = fc.array(
      fc.uint8Array({ minLength: 1, maxLength: 200 }).map((b) => b.map((x) => (x < 60 ? 10 : x))),
      { minLength: 1, maxLength: 3 },
    );
    await fc.assert(
      fc.asyncProperty(
        files,
        fc.constantFrom(...RULES),
        fc.constantFrom(2, 4, 6, 16, 50, 1024),
        fc.nat(),
        fc.nat(),
        async (contents, rule, chunkBytes, a, b) => {
          const names = contents.map((_, i) => `p${i}.bin`);
          const shapedFiles = contents.map((bytes) => shaped(bytes, rule));
          await Promise.all(names.map((n, i) => writeFile(join(folder, n), shapedFiles[i])));
          const { even: _, ...more } = rule;
          const own = spec(names, more);
          const whole = await loadCorpus(own, folder).catch((error: unknown) => error);
          if (whole instanceof Error) {
            await expect(openStreamedCorpus(own, folder, { chunkBytes })).rejects.toThrow(
              whole.message,
            );
            return;
          }
          const corpus = whole as Awaited<ReturnType<typeof loadCorpus>>;
          const streamed = await openStreamedCorpus(own, folder, { chunkBytes });
          expect(streamed.sha256).toBe(corpus.sha256);
          expect(streamed.files).toEqual(corpus.files);
          expect(streamed.messageEnds).toEqual(corpus.sequence.messageEnds);
          expect(streamed.fileEnds).toEqual(corpus.fileEnds);
          expect(streamed.lengths).toBe(corpus.lengths);
          expect(streamed.alphabetSize).toBe(corpus.sequence.alphabetSize);
          const histogram = new Float64Array(streamed.alphabetSize);
          for (const symbol of corpus.sequence.symbols) histogram[symbol]++;
          expect(
            Buffer.from(streamed.symbolCounts.buffer).equals(Buffer.from(histogram.buffer)),
          ).toBe(true);

          const ends = [...corpus.sequence.messageEnds];
          const counts = ends.map((end, i) => end - (ends[i - 1] ?? 0));
          const from = a % (ends.length + 1);
          const to = from + (b % (ends.length - from + 1));
          const start = ends[from - 1] ?? 0;
          const got = gather(streamed.chunks(from, to), counts.slice(from, to));
          const stop = to === 0 ? 0 : ends[to - 1];
          expect(got.symbols).toEqual([...corpus.sequence.symbols.subarray(start, stop)]);
          expect(got.ends).toEqual(ends.slice(from, to).map((end) => end - start));
        },
      ),
      { numRuns: 120 },
    );
  }, 20_000);

  test.each([
    ['a frame', Buffer.from([2, 65, 66, 5, 67]), 'prefix=u8', 'inside a length-prefixed frame'],
    ['a prefix', Buffer.from([0, 1, 65, 0]), 'prefix=u16be', 'inside a length-prefixed prefix'],
  ])(
    'names the place where a file ends inside %s, as for the whole',
    async (_, bytes, messages, text) => {
      await writeFile(join(folder, 'cut.bin'), bytes);
      const own = spec(['cut.bin'], { messages });
      const whole = await loadCorpus(own, folder).catch((error: InputError) => error);
      const pieces = await openStreamedCorpus(own, folder, { chunkBytes: 2 }).catch(
        (error: InputError) => error,
      );
      expect(pieces).toBeInstanceOf(InputError);
      expect((pieces as InputError).message).toContain(text);
      expect((pieces as InputError).where).toEqual((whole as InputError).where);
    },
  );

  test('refuses a file that changes between passes', async () => {
    await writeFile(join(folder, 'moving.bin'), 'before');
    const streamed = await openStreamedCorpus(spec(['moving.bin'], {}), folder);
    await writeFile(join(folder, 'moving.bin'), 'behind');
    await utimes(join(folder, 'moving.bin'), 1, 1);
    expect(() => [...streamed.chunks(0, 1)]).toThrow('moving.bin changed while it was read');
  });

  test('bounds the number of messages', async () => {
    await writeFile(join(folder, 'many.log'), '\n'.repeat(9) + 'x'.repeat(9));
    const own = spec(['many.log'], { messages: 'lines' });
    await expect(openStreamedCorpus(own, folder, { maxMessages: 9 })).rejects.toThrow(
      'too many messages',
    );
    await expect(openStreamedCorpus(own, folder, { maxMessages: 10 })).resolves.toBeDefined();
  });

  test.each([
    [{ symbols: 'codepoints' }, 'whole files'],
    [{ symbols: 'csv:speed' }, 'whole files'],
    [{ messages: 'fill=192,unit=24' }, 'filled'],
    [{ symbols: 'u16le', messages: 'lines' }, '16-bit symbols'],
    [{ alphabet: 300 }, 'alphabet'],
  ])('says why %j cannot be streamed', (more, reason) => {
    expect(whyNotStreamed(spec(['x'], more))).toContain(reason);
  });
});
