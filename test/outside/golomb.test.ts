/**
 * S. W. Golomb, IEEE Trans. Inf. Theory 12(3), 1966: the code words. R. G. Gallager, D. C. Van Voorhis, IEEE Trans. Inf. Theory
 * 21(2), 1975: the best divisor of a geometric source is the least m with θ^m + θ^(m+1) ≤ 1. Vectors recomputed from those
 * rules by an independent script; mean lengths also from a closed form.
 */
import { describe, expect, it } from 'vitest';
import { adaptedDivisor, golombFamily } from '../../src/coders/golomb.ts';
import { SymbolCounts } from '../../src/coders/huffman-counts.ts';
import { RunningMean } from '../../src/coders/integer-mean.ts';
import { riceFamily } from '../../src/coders/rice.ts';
import { bitsOf, symbolsOf } from './integer-words.ts';
import vectors from './vectors/golomb-gallager-vanvoorhis.json' with { type: 'json' };

/** The papers end a run of ones with a zero; the coder ends zeros with a one. */
function turnUnary(word: string): string {
  const ones = word.indexOf('0');
  return `${'0'.repeat(ones)}1${word.slice(ones + 1)}`;
}

describe('Golomb 1966: code words', () => {
  for (const { m, k, codes } of vectors.cases) {
    if (codes === undefined) continue;
    const [family, parameter] = m === undefined ? [riceFamily, k!] : [golombFamily, m];
    it(`${family.name} ${family.key}=${parameter}: the first ${codes.length}`, () => {
      for (const [symbol, code] of codes.entries()) {
        const word = turnUnary(code);
        expect(bitsOf(family, [symbol], parameter)).toBe(word);
        expect(symbolsOf(family, word, 1, parameter)).toEqual([symbol]);
        expect(family.wordBits(symbol, parameter)).toBe(word.length);
      }
    });
    if (m === undefined) {
      it(`golomb m=${2 ** k!} is rice k=${k}`, () => {
        for (const [symbol, code] of codes.entries())
          expect(bitsOf(golombFamily, [symbol], 2 ** k!)).toBe(turnUnary(code));
      });
    }
  }
});

/** Counts of a geometric source, 2^44 symbols in all but for rounding. */
function geometricCounts(theta: number): SymbolCounts {
  const counts = new SymbolCounts(65_536);
  for (let symbol = 0; symbol < 65_536; symbol++) {
    const count = Math.round(2 ** 44 * (1 - theta) * theta ** symbol);
    if (count === 0) break;
    counts.counts[symbol] = count;
    counts.seen[counts.seenCount++] = symbol;
    counts.total += count;
  }
  return counts;
}

describe('Gallager and Van Voorhis 1975: the best divisor of a geometric source', () => {
  const sources = vectors.cases.filter((c) => 'theta' in c);

  it.each(sources.map((s) => [s.theta!, s.m_opt!, s.mean_len_bits!]))(
    'θ = %d: m = %d',
    (theta, divisor, meanBits) => {
      const counts = geometricCounts(theta);
      const { parameter, bits } = golombFamily.chooser().choose(counts);
      expect(parameter).toBe(divisor);
      expect(bits / counts.total).toBeCloseTo(meanBits, 7);
    },
  );

  it.each(sources.map((s) => [s.theta!, s.rice_k_best!, s.rice_mean_len_bits!]))(
    'θ = %d: Rice k = %d',
    (theta, k, meanBits) => {
      const counts = geometricCounts(theta);
      const { parameter, bits } = riceFamily.chooser().choose(counts);
      expect(parameter).toBe(k);
      expect(bits / counts.total).toBeCloseTo(meanBits, 7);
    },
  );

  // The rule's expansion for large means; 0.618 and 0.6181 stand on purpose at either side of the edge from 1 to 2.
  it.each(
    sources.filter((s) => Math.trunc(s.theta! * 1000) !== 618).map((s) => [s.theta!, s.m_opt!]),
  )('θ = %d: the adaptive rule gives m = %d', (theta, divisor) => {
    const mean = new RunningMean(65_536);
    mean.count = 1_000_000;
    mean.sum = Math.round((1_000_000 * theta) / (1 - theta));
    expect(adaptedDivisor(mean)).toBe(divisor);
  });
});
