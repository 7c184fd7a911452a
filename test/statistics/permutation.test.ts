import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { signFlipTest, twoSampleTest } from '../../src/statistics/permutation.ts';

describe('signFlipTest', () => {
  it('counts half of all signs, and those of the same sum, above the observed for mirrored data', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: -50, max: 50 }), { minLength: 1, maxLength: 9 }),
        (list) => {
          const one = signFlipTest(list);
          const other = signFlipTest(list.map((d) => -d));
          expect(one.total).toBe(2 ** list.length);
          expect(one.twoSided).toBe(other.twoSided);
          // Every choice of signs lies at or above the observed sum, or at or below: those equal to it are in both.
          expect(one.greater + other.greater).toBeGreaterThan(one.total);
        },
      ),
    );
  });

  it('tells one difference nothing, and many alike all it can', () => {
    expect(signFlipTest([4])).toEqual({ greater: 1, twoSided: 2, total: 2 });
    expect(signFlipTest(new Array(10).fill(0.1))).toEqual({ greater: 1, twoSided: 2, total: 1024 });
  });

  it('refuses nothing and too much', () => {
    expect(() => signFlipTest([])).toThrow(InputError);
    expect(() => signFlipTest(new Array(25).fill(1))).toThrow(InputError);
  });
});

describe('twoSampleTest', () => {
  it('finds every way as large where all values are alike, and one where groups are apart', () => {
    expect(twoSampleTest([1, 1], [1, 1, 1])).toEqual({ greater: 10, twoSided: 10, total: 10 });
    expect(twoSampleTest([0.5, 0.6], [0.1, 0.2])).toEqual({ greater: 1, twoSided: 2, total: 6 });
  });

  it('refuses an empty group and too many ways', () => {
    expect(() => twoSampleTest([], [1])).toThrow(InputError);
    expect(() => twoSampleTest([1], [])).toThrow(InputError);
    expect(() => twoSampleTest(new Array(20).fill(1), new Array(20).fill(2))).toThrow(InputError);
  });
});
