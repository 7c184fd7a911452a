import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { reconcileSentence } from '../../src/entropy/reconcile.ts';

/** Orders with the largest estimable one, and those useful, 'y' yes, 'n' no, '-' not tested. */
const sentence = (largestEstimable: number, useful: string) =>
  reconcileSentence(
    [...useful].map((letter, k) => ({
      k,
      estimable: k <= largestEstimable,
      useful: letter === '-' ? undefined : letter === 'y',
    })),
  );

describe('reconcileSentence', () => {
  it.each([
    [2, '---', /^These data are enough .* up to order 2; .* was not tested\.$/],
    [-1, '---', /^These data are too few .* was not tested\.$/],
    [-1, 'nn-', /^These data are too few .* no order tested saves bits/],
    [-1, 'yn-', /^These data are too few .* yet order 0 saves bits/],
    [1, 'nn-', /^These data are enough .* up to order 1, but no order tested saves bits/],
    [1, 'yyn', /^Order 1 is both the highest /],
    [1, 'yyy', /^Order 2 still saves bits .* only up to order 1: /],
    [
      2,
      'ynn',
      /^These data are enough .* up to order 2, but what the first half teaches of orders above 0 saves/,
    ],
    [2, 'nyn', /up to order 2, but what the first half teaches of orders above 1 saves/],
  ])('largest estimable %d, useful %s', (largest, useful, expected) => {
    expect(sentence(largest, useful)).toMatch(expected);
  });

  it('is always one sentence', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: -1, max: 4 }),
        fc.string({ unit: fc.constantFrom('y', 'n', '-'), maxLength: 5 }),
        (largest, useful) => {
          expect(sentence(largest, useful)).toMatch(/^[^.]+\.$/);
        },
      ),
    );
  });
});
