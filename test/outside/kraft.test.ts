/**
 * L. G. Kraft 1949, B. McMillan 1956: a prefix code with given lengths exists if and only if Σ 2^−l
 * ≤ 1.
 */
import { describe, expect, it } from 'vitest';
import { PromiseError } from '../../src/errors/errors.ts';
import { canonicalCodes, LengthTally } from '../../src/stages/prefix-code.ts';
import vectors from './vectors/kraft.json' with { type: 'json' };

describe('Kraft’s inequality', () => {
  it.each(
    vectors.cases.map((c) => [c.lengths, c.kraft, c.prefix_code_exists, c.complete] as const),
  )('%j sums to %s', (list, _, exists, complete) => {
    const lengths = Uint8Array.from(list);
    if (!exists) {
      expect(() => canonicalCodes(lengths)).toThrow(PromiseError);
      return;
    }
    const codes = canonicalCodes(lengths);
    const words = list.map((length, i) => codes[i].toString(2).padStart(length, '0'));
    for (const [i, word] of words.entries())
      expect(words.some((other, j) => j !== i && other.startsWith(word))).toBe(false);
    const tally = new LengthTally();
    tally.take(lengths, lengths.length);
    expect(tally.complete).toBe(complete);
  });
});
