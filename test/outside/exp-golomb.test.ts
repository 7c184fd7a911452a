/**
 * ITU-T H.264, clause 9.1: ue(v), which is the exponential Golomb code of order 0, and se(v), which numbers signed values
 * 0, 1, −1, 2, −2 …: the order of zigzag with the sign turned. Words 0 to 8 and the signed rule as read in pages about the
 * standard, the others recomputed from the rule.
 */
import { describe, expect, it } from 'vitest';
import { expGolombFamily } from '../../src/coders/exp-golomb.ts';
import { zigzag } from '../../src/transforms/zigzag.ts';
import { bitsOf, symbolsOf } from './integer-words.ts';
import vectors from './vectors/itu-h264-exp-golomb.json' with { type: 'json' };

describe('ITU-T H.264 clause 9.1', () => {
  it('ue(v): words 0 to 63', () => {
    expect(vectors.cases.length).toBe(64);
    for (const { codeNum, ue_bits } of vectors.cases) {
      expect(bitsOf(expGolombFamily, [codeNum], 0)).toBe(ue_bits);
      expect(symbolsOf(expGolombFamily, ue_bits, 1, 0)).toEqual([codeNum]);
      expect(expGolombFamily.wordBits(codeNum, 0)).toBe(ue_bits.length);
    }
  });

  it('se(v): the signed values in the order of zigzag', () => {
    const alphabetSize = 1024;
    // −x modulo the alphabet.
    const symbols = Uint16Array.from(
      vectors.cases,
      ({ se_value }) => (alphabetSize - se_value) % alphabetSize,
    );
    const folded = zigzag
      .forward(alphabetSize, false)
      .push({ alphabetSize, symbols, messageEnds: Uint32Array.of(symbols.length) });
    expect([...folded.symbols]).toEqual(vectors.cases.map(({ codeNum }) => codeNum));
  });
});
