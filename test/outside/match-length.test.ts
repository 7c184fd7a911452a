/**
 * Match-length rates (Kontoyiannis, Algoet, Suhov, Wyner 1998, increasing window) and components of the Lempel–Ziv history
 * (Lempel & Ziv 1976): the 1976 paper's own example, counts of an outside unit test, and cases computed outside in two ways.
 */
import { describe, expect, it } from 'vitest';
import { matchLengthEntropy } from '../../src/entropy/match-lengths.ts';
import { sortedSuffixes } from '../../src/models/suffix-common.ts';
import { Repeats } from '../../src/models/suffix-repeats.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';
import vectors from './vectors/sequence-estimators.json' with { type: 'json' };

const symbolsOf = (text: string): Uint8Array => Uint8Array.from(text, (c) => c.charCodeAt(0));
const repeatsOf = (text: string): Repeats => new Repeats(sortedSuffixes(symbolsOf(text)));

describe.each(vectors.cases.filter((c) => c.sequence !== undefined))('$name', (vector) => {
  const text = vector.sequence!;
  const found = matchLengthEntropy(oneMessage(symbolsOf(text), 256), {
    orders: [],
    largestEstimable: -1,
  });

  it('has the rate by match lengths found outside', () => {
    expect(found.positions).toBe(vector.n! - 1);
    expect(found.publishedBitsPerSymbol).toBeCloseTo(vector.increasing_window_rate_bits!, 12);
    expect((found.meanMatch + 1) * found.positions).toBeCloseTo(
      vector.match_length_sum_from_position_1!,
      9,
    );
  });

  it('has the components found outside', () => {
    expect(found.components).toBe(vector.lz76_components);
    expect(found.lempelZivBitsPerSymbol).toBeCloseTo(vector.lz76_rate_bits!, 12);
  });

  const lengths = vector.match_lengths_from_position_1;
  if (lengths) {
    it('has the match lengths found outside', () => {
      const own = [...repeatsOf(text).pastMatches()].slice(1);
      expect(own.map((length) => length + 1)).toEqual(lengths);
    });
  }
});

it.each(vectors.cases.find((c) => c.cases !== undefined)!.cases!)(
  '$sequence has $components components',
  ({ sequence, components }) => {
    expect(repeatsOf(sequence).componentCount()).toBe(components);
  },
);
