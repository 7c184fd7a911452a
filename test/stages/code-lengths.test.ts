import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { InputError, PromiseError } from '../../src/errors/errors.ts';
import { ABSENT, CodeLengthFitter, codeLengths } from '../../src/stages/code-lengths.ts';
import { exhaustiveTotal, levelwiseTotal, sumOfMergedWeights, totalOf } from './huffman-oracles.ts';

/** 2^32 · Kraft sum of the words. */
function kraft(lengths: Uint8Array): number {
  return lengths.reduce((sum, length) => sum + (length === ABSENT ? 0 : 2 ** (32 - length)), 0);
}

/** Weights of many magnitudes, with many ties; their sum stays below 2^53. */
const weight = fc.oneof(
  fc.integer({ min: 1, max: 4 }),
  fc.integer({ min: 1, max: 1000 }),
  fc.integer({ min: 1, max: 2 ** 40 }),
  fc.nat({ max: 40 }).map((power) => 2 ** power),
);

describe('code lengths without a binding limit', () => {
  it('cost the sum of merged weights, are complete, follow the weights and prefer lower symbols', () => {
    fc.assert(
      fc.property(fc.array(weight, { minLength: 2, maxLength: 300 }), (weights) => {
        fc.pre(weights.reduce((a, b) => a + b) < 2 ** 32 || weights.length < 30);
        const lengths = codeLengths(weights, 32);
        if (sumOfMergedWeights(weights) !== totalOf(weights, lengths)) {
          // Only a tree deeper than 32 may cost more; then the levelwise oracle must agree.
          expect(totalOf(weights, lengths)).toBe(levelwiseTotal(weights.map(BigInt), 32));
        }
        expect(kraft(lengths)).toBe(2 ** 32);
        for (let i = 0; i < weights.length; i++) {
          for (let j = i + 1; j < weights.length; j++) {
            if (weights[i] > weights[j]) expect(lengths[i]).toBeLessThanOrEqual(lengths[j]);
            if (weights[i] < weights[j]) expect(lengths[i]).toBeGreaterThanOrEqual(lengths[j]);
            if (weights[i] === weights[j]) expect(lengths[i]).toBeLessThanOrEqual(lengths[j]);
          }
        }
      }),
      { numRuns: 60 },
    );
  });

  it('are exact where weights and indices do not share a double, near 2^53', () => {
    const weights = [2 ** 52, 2 ** 51, 2 ** 50 + 1, 2 ** 50 - 5, 1, 1];
    expect(totalOf(weights, codeLengths(weights, 32))).toBe(sumOfMergedWeights(weights));
    expect(Array.from(codeLengths(weights, 32))).toEqual([1, 2, 3, 4, 5, 5]);
  });

  it('give no word to a zero weight and an empty one to a lone symbol', () => {
    expect(Array.from(codeLengths([0, 3, 0, 1], 8))).toEqual([ABSENT, 1, ABSENT, 1]);
    expect(Array.from(codeLengths([0, 9, 0], 8))).toEqual([ABSENT, 0, ABSENT]);
    expect(Array.from(codeLengths([0, 0], 8))).toEqual([ABSENT, ABSENT]);
    expect(Array.from(codeLengths([], 8))).toEqual([]);
  });

  it('of 65 536 equal weights are 16 bits each, at the least limit that allows it', () => {
    const weights = new Float64Array(65536).fill(7);
    expect(codeLengths(weights, 16).every((length) => length === 16)).toBe(true);
    expect(() => codeLengths(new Float64Array(65537).fill(7), 16)).toThrow(InputError);
    expect(Math.max(...codeLengths(new Float64Array(65535).fill(7), 16))).toBe(16);
  });
});

describe('code lengths with a limit', () => {
  it('cost what exhaustive search finds', () => {
    fc.assert(
      fc.property(
        fc.array(weight, { minLength: 2, maxLength: 6 }),
        fc.integer({ min: 1, max: 5 }),
        (weights, maxBits) => {
          const least = exhaustiveTotal(weights.map(BigInt), maxBits);
          if (least === undefined) {
            expect(() => codeLengths(weights, maxBits)).toThrow(InputError);
            return;
          }
          const lengths = codeLengths(weights, maxBits);
          expect(totalOf(weights, lengths)).toBe(least);
          expect(kraft(lengths)).toBe(2 ** 32);
          expect(Math.max(...lengths)).toBeLessThanOrEqual(maxBits);
        },
      ),
      { numRuns: 150 },
    );
  });

  it('cost what a levelwise search finds for more weights', () => {
    fc.assert(
      fc.property(
        fc.array(weight, { minLength: 2, maxLength: 24 }),
        fc.integer({ min: 0, max: 6 }),
        (weights, over) => {
          const maxBits = Math.max(1, Math.ceil(Math.log2(weights.length))) + over;
          const lengths = codeLengths(weights, maxBits);
          expect(totalOf(weights, lengths)).toBe(levelwiseTotal(weights.map(BigInt), maxBits));
          expect(kraft(lengths)).toBe(2 ** 32);
          expect(Math.max(...lengths)).toBeLessThanOrEqual(maxBits);
        },
      ),
      { numRuns: 80 },
    );
  });

  it('are exact for packages far above 2^53', () => {
    // Growing like Fibonacci numbers up to a sum just below 2^53, so that the limit binds hard.
    const weights = [1, 1];
    while (weights.length < 74) weights.push(weights.at(-1)! + weights.at(-2)!);
    for (const maxBits of [7, 8, 12, 24, 31, 32]) {
      const lengths = codeLengths(weights, maxBits);
      expect(totalOf(weights, lengths)).toBe(levelwiseTotal(weights.map(BigInt), maxBits));
      expect(Math.max(...lengths)).toBe(maxBits);
    }
  });
});

describe('weights that no code is fitted to', () => {
  it.each([[[1, -1]], [[1, 0.5]], [[1, Number.NaN]], [[1, 2 ** 53]]])('%j', (weights) => {
    expect(() => codeLengths(weights, 8)).toThrow(PromiseError);
  });

  it('sum to 2^53 or more', () => {
    expect(() => codeLengths([2 ** 52, 2 ** 52], 8)).toThrow(InputError);
    expect(Array.from(codeLengths([2 ** 52, 2 ** 52 - 1], 8))).toEqual([1, 1]);
  });
});

describe('a fitter used again', () => {
  it('gives what a fresh one gives', () => {
    const fitter = new CodeLengthFitter();
    fc.assert(
      fc.property(
        fc.array(weight, { minLength: 1, maxLength: 60 }),
        fc.integer({ min: 6, max: 32 }),
        (weights, maxBits) => {
          const lengths = new Uint8Array(weights.length);
          fitter.fit(Float64Array.from(weights), weights.length, maxBits, lengths);
          expect(lengths).toEqual(codeLengths(weights, maxBits));
        },
      ),
    );
  });
});
