import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  RAW,
  residualOf,
  TRANSFORM_CODES,
  valueBeside,
  valueFrom,
  zigzagBetween,
} from '../../src/models/field-residual.ts';
import {
  bucketOf,
  EXTRA_BITS,
  LEAST_VALUE,
  MOST_TOKENS,
  tokenCount,
  tokenOf,
} from '../../src/models/field-token.ts';

describe('tokens', () => {
  it('part the integers of 32 bits without gap, each with as many values as its extra bits count', () => {
    let next = 0;
    for (let token = 0; token < MOST_TOKENS; token++) {
      expect(LEAST_VALUE[token]).toBe(next);
      expect(tokenOf(next)).toBe(token);
      next += 2 ** EXTRA_BITS[token];
      expect(tokenOf(next - 1)).toBe(token);
    }
    expect(next).toBe(2 ** 32);
  });

  it('are as many as a width has values for', () => {
    for (let width = 1; width <= 32; width++)
      expect(tokenCount(width)).toBe(tokenOf(2 ** width - 1) + 1);
  });

  it('have size classes by bit length, at most 7', () => {
    const classes = [0, 1, 2, 3, 4, 7, 8, 63, 64, 2 ** 32 - 1].map(bucketOf);
    expect(classes).toEqual([0, 1, 2, 2, 3, 3, 4, 6, 7, 7]);
  });
});

const widths = fc.integer({ min: 1, max: 32 });
const draws = widths.chain((width) => {
  const edge = fc.constantFrom(0, 1, 2 ** (width - 1), 2 ** width - 1);
  const value = fc.oneof(edge, fc.integer({ min: 0, max: 2 ** width - 1 }));
  return fc.tuple(fc.constant(width), value, value, value);
});

describe('residuals', () => {
  it('lead back to the value, and fit its width', () => {
    fc.assert(
      fc.property(draws, fc.nat({ max: 1 }), ([width, drawn, before, beforeThat], signed) => {
        const value = drawn % 2 ** width;
        const shift = 32 - width;
        for (const code of Object.values(TRANSFORM_CODES)) {
          const residual = residualOf(code, value, before, beforeThat, shift, signed);
          expect(residual).toBeGreaterThanOrEqual(0);
          expect(residual).toBeLessThan(2 ** width);
          expect(valueFrom(code, residual, before, beforeThat, shift, signed)).toBe(value);
        }
        const residual = zigzagBetween(value, before, shift);
        expect(valueBeside(residual, before, shift)).toBe(value);
      }),
      { numRuns: 500 },
    );
  });

  it('are the least difference around the circle, as 0, −1, 1, −2 …', () => {
    fc.assert(
      fc.property(draws, ([width, value, before]) => {
        const circle = 2n ** BigInt(width);
        let difference = (BigInt(value) - BigInt(before) + circle) % circle;
        if (difference >= circle / 2n) difference -= circle;
        const zigzag = difference >= 0n ? 2n * difference : -2n * difference - 1n;
        expect(BigInt(zigzagBetween(value, before, 32 - width))).toBe(zigzag);
      }),
      { numRuns: 500 },
    );
  });

  it('of raw are the value itself, with the sign folded in where there is one', () => {
    expect(residualOf(RAW, 200, 7, 9, 24, 0)).toBe(200);
    expect(residualOf(RAW, 0xff, 7, 9, 24, 1)).toBe(1);
    expect(residualOf(RAW, 0x80, 7, 9, 24, 1)).toBe(255);
  });
});
