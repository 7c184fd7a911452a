import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { extrapolate } from '../../src/entropy/extrapolation.ts';

const ordersOf = (rates: readonly number[], estimable = rates.length) =>
  rates.map((corrected, k) => ({ k, corrected, estimable: k < estimable }));

describe('extrapolate', () => {
  it('finds the law that made the entropies', () => {
    const laws = fc.record({
      limit: fc.double({ min: 0.1, max: 6, noNaN: true }),
      scale: fc.double({ min: 0.2, max: 2, noNaN: true }),
      ratio: fc.double({ min: 0.1, max: 0.85, noNaN: true }),
      count: fc.integer({ min: 3, max: 7 }),
    });
    fc.assert(
      fc.property(laws, ({ limit, scale, ratio, count }) => {
        const rates = Array.from({ length: count }, (_, k) => limit + scale * ratio ** k);
        const found = extrapolate(ordersOf([...rates, 0, 0], count))!;
        expect(found.valid).toBe(true);
        expect(found.upto).toBe(count - 1);
        expect(found.bitsPerSymbol).toBeCloseTo(limit, 4);
        expect(found.ratio).toBeCloseTo(ratio, 4);
        expect(found.miss).toBeLessThan(1e-5);
      }),
    );
  });

  it('has no answer for fewer than three estimable orders', () => {
    expect(extrapolate([])).toBeUndefined();
    expect(extrapolate(ordersOf([4, 3, 2.5, 2.2], 2))).toBeUndefined();
    expect(extrapolate(ordersOf([4, 3, 2.5, 2.2], 3))).toBeDefined();
  });

  it.each([
    ['equal', [3, 3, 3], 'do not fall'],
    ['rising', [3, 2.5, 2.6], 'do not fall'],
    ['falling by the same step', [4, 3, 2], 'level off'],
    ['falling faster and faster', [4, 3.9, 3], 'level off'],
    ['constant data', [0, 0, 0, 0], 'do not fall'],
    ['below 0 in the limit', [1, 0.5, 0.1], 'below 0'],
    ['of another law', [4, 3.99, 1, 0.99], 'level off'],
    ['falling once', [8, 4, 3.99, 3.98, 2], 'another law'],
  ])('is flagged, and finite, for entropies %s', (_, rates, reason) => {
    const found = extrapolate(ordersOf(rates))!;
    expect(found.valid).toBe(false);
    expect(found.reason).toContain(reason);
    expect(Number.isFinite(found.bitsPerSymbol)).toBe(true);
  });

  it('is never negative, and valid only below the last entropy', () => {
    const lists = fc.array(fc.double({ min: 0, max: 8, noNaN: true }), {
      minLength: 3,
      maxLength: 8,
    });
    fc.assert(
      fc.property(lists, (rates) => {
        const sorted = rates.toSorted((a, b) => b - a);
        const found = extrapolate(ordersOf(sorted))!;
        expect(found.bitsPerSymbol).toBeGreaterThanOrEqual(0);
        if (found.valid) {
          expect(found.bitsPerSymbol).toBeLessThanOrEqual(sorted.at(-1)! + found.miss);
        }
      }),
    );
  });
});
