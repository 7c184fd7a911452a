/**
 * F. M. J. Willems, Y. M. Shtarkov, T. J. Tjalkens, "The context-tree weighting method: basic properties", IEEE Trans. IT
 * 41(3), 1995: the worked tree of depth 3, and further cases recomputed as exact fractions.
 */
import { describe, expect, it } from 'vitest';
import { CtwModel } from '../../src/models/ctw.ts';
import { bitsOf, weightedProbability } from '../models/ctw-reference.ts';
import vectors from './vectors/ctw-1995.json' with { type: 'json' };

/** Seven to ten bits over up to four nodes each, with probabilities in 65536ths: below a thousandth of a bit in all. */
const TOLERANCE_BITS = 0.001;

const cases = vectors.cases.map((c) => [c.past_oldest_first, c.sequence, c] as const);

describe('context-tree weighting', () => {
  it.each(cases)(
    'after %s, %s: the block form gives the published fraction',
    (past, sequence, c) => {
      const { top, bottom } = weightedProbability(past, sequence, c.depth);
      const [publishedTop, publishedBottom] = c.root_weighted_probability.split('/').map(BigInt);
      expect(top * publishedBottom).toBe(bottom * publishedTop);
      expect(bitsOf({ top, bottom })).toBeCloseTo(c.bits, 10);
    },
  );

  it.each(cases)('after %s, %s: the integer model costs as many bits', (past, sequence, c) => {
    const model = new CtwModel(2, c.depth);
    for (const bit of past) model.see(Number(bit));
    let bits = 0;
    const symbols = Uint8Array.from(sequence, Number);
    model.encode(symbols, 0, symbols.length, {
      put: (bit, ones) => {
        bits -= Math.log2((bit === 1 ? ones : 65_536 - ones) / 65_536);
      },
    });
    expect(Math.abs(bits - c.bits)).toBeLessThan(TOLERANCE_BITS);
  });
});
