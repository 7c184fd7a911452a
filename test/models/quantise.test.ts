import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Quantiser } from '../../src/models/quantise.ts';

function quantise(weights: number[], total: number): number[] {
  const frequencies = new Uint32Array(weights.length + 3);
  new Quantiser().quantise(
    Float64Array.from([9, ...weights, 9, 9]),
    frequencies,
    1,
    1 + weights.length,
    total,
  );
  expect([frequencies[0], frequencies.at(-1)]).toEqual([0, 0]);
  return [...frequencies.subarray(1, 1 + weights.length)];
}

const lengthBits = (weights: number[], frequencies: number[], total: number) =>
  weights.reduce((sum, weight, i) => sum + weight * Math.log2(total / frequencies[i]), 0);

/** Least code length over all ways to split `total` into positive parts. */
function leastBits(weights: number[], total: number): number {
  const best = (from: number, left: number): number => {
    if (from === weights.length - 1) return -weights[from] * Math.log2(left);
    let least = Infinity;
    for (let f = 1; f <= left - (weights.length - 1 - from); f++) {
      least = Math.min(least, -weights[from] * Math.log2(f) + best(from + 1, left - f));
    }
    return least;
  };
  return best(0, total) + weights.reduce((a, b) => a + b, 0) * Math.log2(total);
}

const weightLists = fc.array(
  fc.oneof(fc.integer({ min: 1, max: 9 }), fc.integer({ min: 1, max: 2 ** 32 })),
  { minLength: 1, maxLength: 200 },
);

describe('Quantiser', () => {
  it('adds up to the total with every frequency at least 1', () => {
    fc.assert(
      fc.property(weightLists, fc.nat(3000), (weights, room) => {
        const total = weights.length + room;
        const frequencies = quantise(weights, total);
        expect(frequencies.reduce((a, b) => a + b, 0)).toBe(total);
        expect(Math.min(...frequencies)).toBeGreaterThanOrEqual(1);
      }),
      { numRuns: 300, seed: 51 },
    );
  });

  it('is exact where the total is a multiple of the weights', () => {
    expect(quantise([8, 4, 2, 1, 1], 64)).toEqual([32, 16, 8, 4, 4]);
    expect(quantise([1, 1, 1], 3)).toEqual([1, 1, 1]);
    expect(quantise([7], 2 ** 14)).toEqual([2 ** 14]);
  });

  it('comes within 1 % of the least code length, by trying all', () => {
    const small = fc.array(fc.integer({ min: 1, max: 60 }), { minLength: 2, maxLength: 4 });
    fc.assert(
      fc.property(small, fc.integer({ min: 4, max: 28 }), (weights, total) => {
        const bits = lengthBits(weights, quantise(weights, total), total);
        expect(bits).toBeLessThanOrEqual(1.01 * leastBits(weights, total) + 1e-9);
      }),
      { numRuns: 200, seed: 52 },
    );
  });
});
