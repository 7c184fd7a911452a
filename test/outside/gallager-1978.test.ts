/**
 * R. G. Gallager, "Variations on a theme by Huffman", IEEE Trans. Inf. Theory 24(6), 1978: the
 * redundancy of a Huffman code is at most p1 + 1 − log2 e + log2 log2 e = p1 + 0.0860713321, p1 the
 * largest probability.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { codeLengths } from '../../src/stages/code-lengths.ts';

const SIGMA = 1 - Math.LOG2E + Math.log2(Math.LOG2E);

describe('Gallager’s bound', () => {
  it('has the constant 0.0860713321', () => {
    expect(SIGMA).toBeCloseTo(0.0860713321, 9);
  });

  it('holds for drawn distributions, and so do 0 ≤ redundancy < 1', () => {
    const weight = fc.oneof(
      fc.integer({ min: 1, max: 10 }),
      fc.integer({ min: 1, max: 100_000 }),
      fc.nat({ max: 24 }).map((power) => 2 ** power),
    );
    fc.assert(
      fc.property(fc.array(weight, { minLength: 2, maxLength: 80 }), (weights) => {
        const total = weights.reduce((a, b) => a + b);
        const lengths = codeLengths(weights, 32);
        let redundancy = 0;
        for (const [i, weight] of weights.entries())
          redundancy += (weight / total) * (lengths[i] + Math.log2(weight / total));
        expect(redundancy).toBeGreaterThan(-1e-12);
        expect(redundancy).toBeLessThan(1);
        expect(redundancy).toBeLessThanOrEqual(Math.max(...weights) / total + SIGMA + 1e-12);
      }),
      { numRuns: 400 },
    );
  });
});
