/**
 * Blocks of memoryless sources whose optimal codes were computed outside by exhaustive construction: mean lengths and entropies
 * per symbol (the setting of Shannon 1948 and of R. G. Gallager, "Variations on a theme by Huffman", 1978). A sequence that
 * holds each block exactly as often as its probability says must give the same figures.
 */
import { expect, it } from 'vitest';
import { blockView } from '../../src/entropy/block-view.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';
import vectors from './vectors/block-huffman.json' with { type: 'json' };

/** Every block of n symbols, as messages of its own, `scale`^n times its probability. */
function exactBlocks(p: readonly number[], n: number, scale: number): SymbolSequence {
  const symbols: number[] = [];
  const fill = (block: readonly number[], times: number): void => {
    if (block.length === n) {
      for (let t = 0; t < times; t++) symbols.push(...block);
      return;
    }
    p.forEach((share, symbol) => {
      fill([...block, symbol], times * Math.round(share * scale));
    });
  };
  fill([], 1);
  const messageEnds = Uint32Array.from({ length: symbols.length / n }, (_, m) => (m + 1) * n);
  return { alphabetSize: p.length, symbols: Uint8Array.from(symbols), messageEnds };
}

// 20^4 blocks of 4 symbols are enough: more would only take longer.
it.each(vectors.cases.filter((c) => c.n <= 4))('$p in blocks of $n', (vector) => {
  const scale = vector.p.every((p) => Number.isInteger(10 * p)) ? 10 : 20;
  const entry = blockView(exactBlocks(vector.p, vector.n, scale), vector.n)[vector.n - 1];
  expect(entry.plugInPerSymbol).toBeCloseTo(vector.entropy_bits, 10);
  expect(entry.huffmanPerSymbol).toBeCloseTo(vector.bits_per_symbol, 10);
  expect(entry.huffmanPerSymbol).toBeLessThan(vector.upper_bound);
});

it('takes enough sources', () => {
  expect(vectors.cases.filter((c) => c.n <= 4).length).toBeGreaterThan(15);
});
