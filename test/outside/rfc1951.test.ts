/**
 * P. Deutsch, RFC 1951 (1996). Section 3.2.2: code words from lengths, the example of eight
 * letters. Section 3.2.6: the fixed code of 288 values, the ends of its ranges.
 */
import { describe, expect, it } from 'vitest';
import { canonicalCodes } from '../../src/stages/prefix-code.ts';
import vectors from './vectors/rfc1951-huffman.json' with { type: 'json' };

function wordsOf(lengths: number[]): string[] {
  const codes = canonicalCodes(Uint8Array.from(lengths));
  return lengths.map((length, i) => codes[i].toString(2).padStart(length, '0'));
}

describe('RFC 1951', () => {
  it('section 3.2.2: words of the eight letters', () => {
    const example = vectors.cases.find((c) => c.kind === 'canonical_example')!;
    expect(wordsOf(example.lengths!)).toEqual(example.codes);
  });

  it('section 3.2.6: words of the fixed code at the ends of each range', () => {
    const fixed = vectors.cases.find((c) => c.kind === 'fixed_literal_length')!;
    const words = wordsOf(
      fixed.lengths_run!.flatMap(([count, length]) => Array(count).fill(length)),
    );
    expect(words.length).toBe(288);
    for (const [value, word] of Object.entries(fixed.range_ends!))
      expect(words[Number(value)]).toBe(word);
  });
});
