import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { type ContextScope, countContexts } from '../../src/models/context-counts.ts';
import { countingBlocks } from '../../src/models/context-counts-blocks.ts';
import { empiricalLengthBits } from '../../src/models/empirical-length.ts';
import { highestStreamedOrder, StreamedCounts } from '../../src/models/stream-counts.ts';
import type { SymbolChunk, SymbolSequence } from '../../src/symbols/sequence.ts';

/** Chunks of so many symbols; no message says how long it is, which counting does not ask. */
function chunksOf({ alphabetSize, symbols, messageEnds }: SymbolSequence, size: number) {
  const chunks: SymbolChunk[] = [];
  let message = 0;
  for (let from = 0; from < symbols.length || message < messageEnds.length; from += size) {
    const to = Math.min(symbols.length, from + size);
    const ends: number[] = [];
    while (message < messageEnds.length && messageEnds[message] <= to)
      ends.push(messageEnds[message++] - from);
    chunks.push({
      alphabetSize,
      symbols: symbols.slice(from, to),
      messageEnds: Uint32Array.from(ends),
    });
  }
  return chunks;
}

const sequences = fc
  .record({
    alphabetSize: fc.constantFrom(1, 2, 5, 256),
    symbols: fc.array(fc.nat(255), { minLength: 1, maxLength: 400 }),
    cuts: fc.array(fc.nat(400), { maxLength: 8 }),
  })
  .map(({ alphabetSize, symbols, cuts }): SymbolSequence => {
    const own = Uint8Array.from(symbols, (s) => s % alphabetSize);
    const ends = cuts.filter((cut) => cut <= own.length).sort((a, b) => a - b);
    return { alphabetSize, symbols: own, messageEnds: Uint32Array.from([...ends, own.length]) };
  });

describe('StreamedCounts', () => {
  test('counts what countContexts counts, for any chunks', () => {
    fc.assert(
      fc.property(
        sequences,
        fc.constantFrom<ContextScope>('message', 'running'),
        fc.integer({ min: 0, max: 2 }),
        fc.integer({ min: 1, max: 9 }),
        fc.integer({ min: 1, max: 500 }),
        (sequence, contexts, upto, blockCount, size) => {
          const { symbols, messageEnds, alphabetSize } = sequence;
          const symbolCounts = new Float64Array(alphabetSize);
          for (const symbol of symbols) symbolCounts[symbol]++;
          const blocks = countingBlocks(symbols.length, blockCount);
          const counts = new StreamedCounts({
            alphabetSize,
            symbolCounts,
            upto,
            contexts,
            messageEnds,
            symbolCount: symbols.length,
            blocks,
          });
          const chunks = chunksOf(sequence, size);
          for (const chunk of chunks) counts.count(chunk);
          counts.settle();
          for (const chunk of chunks) counts.spread(chunk);
          const whole = countContexts(sequence, { upto, contexts, blocks: blocks.ends });
          const streamed = counts.finish();
          expect(streamed).toHaveLength(upto + 1);
          streamed.forEach((order, k) => {
            const { blockBits, ...exact } = order;
            const { blockBits: wholeBits, ...wholeExact } = whole[k];
            expect(exact).toEqual(wholeExact);
            // The whole may have been sorted, which rounds code lengths otherwise.
            blockBits.forEach((bits, b) => {
              expect(Math.abs(bits - wholeBits[b])).toBeLessThanOrEqual(1e-5 * (1 + wholeBits[b]));
            });
            const fit = empiricalLengthBits(sequence, k, contexts === 'message');
            expect(Math.abs(counts.fitBits(k) - fit)).toBeLessThanOrEqual(1e-9 * (1 + fit));
          });
        },
      ),
      { numRuns: 400 },
    );
  });

  test('knows which tables are small enough', () => {
    expect([1, 256, 257, 4096, 4097, 2 ** 24, 2 ** 24 + 1].map(highestStreamedOrder)).toEqual([
      2, 2, 1, 1, 0, 0, -1,
    ]);
  });
});
