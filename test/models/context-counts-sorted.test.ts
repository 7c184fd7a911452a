import fc from 'fast-check';
import { expect, it } from 'vitest';
import { countContexts } from '../../src/models/context-counts.ts';
import { countingBlocks } from '../../src/models/context-counts-blocks.ts';
import { rankSymbols } from '../../src/models/context-counts-ranks.ts';
import { sortWindows } from '../../src/models/context-counts-sorted.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { oneMessage, type SymbolArray } from '../../src/symbols/sequence.ts';
import { bruteCounts } from './context-counts-brute.ts';

/** Few or many alike windows: a long draw of which a part is repeated. */
function drawn(alphabetSize: number, length: number, repeated: number, seed: number): SymbolArray {
  const generator = new SeededGenerator(seed);
  const symbols = new Uint32Array(length);
  for (let i = 0; i < length; i++) symbols[i] = generator.integer(0, alphabetSize - 1);
  symbols.copyWithin(length - repeated, 0, repeated);
  return symbols;
}

it('sorts the same whatever lead is expected', () => {
  const cases = fc.record({
    alphabetSize: fc.constantFrom(1, 2, 20, 300, 70_000),
    length: fc.integer({ min: 0, max: 400 }),
    share: fc.double({ min: 0, max: 1, noNaN: true }),
    width: fc.integer({ min: 1, max: 8 }),
    seed: fc.nat(),
  });
  fc.assert(
    fc.property(cases, ({ alphabetSize, length, share, width, seed }) => {
      const repeated = Math.floor(share ** 3 * length);
      const ranked = rankSymbols(drawn(alphabetSize, length, repeated, seed));
      const ends = Uint32Array.of(Math.floor(length / 3), length);
      const blocks = countingBlocks(length, 5);
      const whole = sortWindows(ranked, ends, width, blocks);
      for (let lead = 1; lead < width; lead++) {
        expect(sortWindows(ranked, ends, width, blocks, lead)).toEqual(whole);
      }
    }),
  );
});

// 300 different symbols carry 8 bits each: two of 3000 windows hardly agree in three symbols, unless a part is repeated.
it.each([
  ['nothing repeated', 0],
  ['a little repeated: ties are compared', 60],
  ['half repeated: all digits are sorted by', 1500],
])('counts as a plain map does where a lead is expected, %s', (_, repeated) => {
  const input = oneMessage(drawn(300, 3000, repeated, 1), 300);
  const upto = 5;
  countContexts(input, { upto, contexts: 'running', blocks: 4 }).forEach((counted, order) => {
    const brute = bruteCounts(input, order, 'running', 4);
    expect(counted.pairs).toBe(brute.pairCounts.length);
    expect(counted.contexts).toBe(brute.contextCounts.length);
    expect(counted.positions).toBe(brute.positions);
    brute.blockBits.forEach((bits, b) => {
      expect(Math.abs(counted.blockBits[b] - bits)).toBeLessThanOrEqual(1e-6 * (1 + bits));
    });
  });
});
