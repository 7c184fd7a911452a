import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { LINE_LETTERS } from '../../src/account/bit-account.ts';
import { gapExtent, pieceFor, SPELLED_LINES, spellGap } from '../../src/report/spelled-gap.ts';

describe('the spelled gap', () => {
  it('writes one letter for each piece of a line', () => {
    // By hand: 0.20 structure, 0.20 learning at 0.05 a letter.
    expect(spellGap({ floor: 3000, structure: 200, learning: 200 }, 1000, 0.05)).toBe('ssssllll');
  });

  it('puts lines below zero in front, in parentheses', () => {
    expect(spellGap({ structure: 300, learning: -100, rounding: 50 }, 1000, 0.05)).toBe(
      '(ll) ssssssr',
    );
  });

  it('is as long as the gap, to one letter, whatever the lines', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: 0, max: 500, noNaN: true }), {
          minLength: SPELLED_LINES.length,
          maxLength: SPELLED_LINES.length,
        }),
        fc.integer({ min: 1, max: 1000 }),
        (values, symbolCount) => {
          const account = Object.fromEntries(SPELLED_LINES.map((line, i) => [line, values[i]]));
          const { above } = gapExtent(account, symbolCount);
          const piece = pieceFor([above], 40);
          const text = spellGap(account, symbolCount, piece);
          expect(Math.abs(text.length - above / piece)).toBeLessThanOrEqual(0.5 + 1e-6);
          expect([...text].every((letter) => Object.values(LINE_LETTERS).includes(letter))).toBe(
            true,
          );
        },
      ),
    );
  });

  it('takes the smallest round piece that fits, but does not let one wide gap flatten the others', () => {
    expect(pieceFor([1.9], 40)).toBe(0.05);
    expect(pieceFor([2.1], 40)).toBe(0.1);
    expect(pieceFor([], 40)).toBe(0.001);
    // The lower quartile is 0.3: 0.9 bit must fit, and the widest gap is cut.
    expect(pieceFor([0.3, 0.4, 9], 40)).toBe(0.05);
    expect(spellGap({ structure: 9000 }, 1000, 0.05, 40)).toBe(`${'s'.repeat(39)}…`);
  });
});
