/**
 * Huffman codes of blocks of n symbols: H ≤ L/n < H + 1/n (C. E. Shannon, Bell Syst. Tech. J. 27,
 * 1948, section 9), redundancy of a block ≤ p1 + 0.0860713321 (R. G. Gallager, IEEE Trans. Inf.
 * Theory 24(6), 1978). Mean lengths made outside this project from the exact probabilities.
 */
import { describe, expect, it } from 'vitest';
import { blockHuffman } from '../../src/coders/block-huffman.ts';
import type { Setup } from '../../src/coders/contract.ts';
import { codeLengths } from '../../src/stages/code-lengths.ts';
import { newSymbolArray, oneMessage } from '../../src/symbols/sequence.ts';
import vectors from './vectors/block-huffman.json' with { type: 'json' };

/** The probabilities as integers over a common denominator, p to two decimals. */
function integerWeights(p: number[], n: number): number[] {
  let scale = 100;
  let single = p.map((x) => Math.round(x * scale));
  for (const divisor of [5, 5, 2, 2]) {
    if (single.every((x) => x % divisor === 0)) {
      single = single.map((x) => x / divisor);
      scale /= divisor;
    }
  }
  let weights = [1];
  for (let i = 0; i < n; i++) weights = weights.flatMap((w) => single.map((x) => w * x));
  expect(weights.reduce((a, b) => a + b)).toBe(scale ** n);
  return weights;
}

describe('block Huffman', () => {
  it.each(vectors.cases.map((c) => [c.p, c.n, c.bits_per_symbol, c] as const))(
    'p = %j, n = %d: %d bits per symbol',
    (p, n, bitsPerSymbol, expected) => {
      const weights = integerWeights(p, n);
      const total = weights.reduce((a, b) => a + b);
      const lengths = codeLengths(weights, 32);
      const mean = weights.reduce((sum, weight, i) => sum + (weight / total) * lengths[i], 0);
      expect(mean / n).toBeCloseTo(bitsPerSymbol, 12);
      expect(mean / n).toBeGreaterThanOrEqual(expected.entropy_bits - 1e-12);
      expect(mean / n).toBeLessThan(expected.upper_bound);
      expect(mean - n * expected.entropy_bits).toBeLessThanOrEqual(expected.gallager_bound_bits);
    },
  );

  // The coder itself, on a message that holds each block exactly as often as its probability says.
  const coded = vectors.cases.filter((c) => c.n <= 4);
  it.each(coded.map((c) => [c.p, c.n, c.bits_per_symbol, c] as const))(
    'p = %j, n = %d: the coder writes %d bits per symbol',
    (p, n, bitsPerSymbol, expected) => {
      const weights = integerWeights(p, n);
      const blocks = weights.reduce((a, b) => a + b);
      const symbols = newSymbolArray(p.length, blocks * n);
      let at = 0;
      for (const [block, count] of weights.entries()) {
        for (let i = 0; i < count; i++) {
          let rest = block;
          for (let j = n - 1; j >= 0; j--) {
            symbols[at + j] = rest % p.length;
            rest = Math.floor(rest / p.length);
          }
          at += n;
        }
      }
      const coder = blockHuffman.create({ n, maxbits: 32 });
      const setup: Setup = {
        policy: 'sent',
        alphabetSize: p.length,
        reset: 'message',
        lengths: 'known',
        align: 1,
      };
      const sequence = oneMessage(symbols, p.length);
      const encoder = coder.encoder(setup);
      encoder.push(sequence);
      const { payloadBits } = encoder.finish();
      expect(payloadBits / symbols.length).toBeCloseTo(bitsPerSymbol, 12);
      const price = coder.price!(sequence, setup);
      expect(price.idealBits / symbols.length).toBeCloseTo(expected.entropy_bits, 9);
      expect(payloadBits).toBeGreaterThanOrEqual(price.idealBits - 1e-6);
    },
  );
});
