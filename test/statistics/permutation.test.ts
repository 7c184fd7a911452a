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

  it('counts as going through the choices one by one does', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: -40, max: 40 }), { minLength: 1, maxLength: 11 }),
        (list) => {
          const observed = list.reduce((sum, d) => sum + d, 0);
          let greater = 0;
          let twoSided = 0;
          for (let signs = 0; signs < 2 ** list.length; signs++) {
            const sum = list.reduce((s, d, i) => s + ((signs >> i) & 1 ? d : -d), 0);
            if (sum >= observed) greater++;
            if (Math.abs(sum) >= Math.abs(observed)) twoSided++;
          }
          expect(signFlipTest(list)).toEqual({ greater, twoSided, total: 2 ** list.length });
          // Sums of thirds are not exact, and must count as equal all the same.
          expect(signFlipTest(list.map((d) => d / 3))).toMatchObject({ greater, twoSided });
        },
      ),
    );
  });

  it('goes through the 2^24 choices of 24 differences', () => {
    // The sum is at least as far from 0 only under the observed signs and their opposite.
    const alike = Array.from({ length: 24 }, (_, i) => i + 1);
    expect(signFlipTest(alike)).toEqual({ greater: 1, twoSided: 2, total: 2 ** 24 });
    expect(signFlipTest(alike.map((d) => -d))).toEqual({
      greater: 2 ** 24,
      twoSided: 2,
      total: 2 ** 24,
    });
    // One against the others: with the sums 300 − 2 and −298 those of all one sign are as far from 0, ± 300.
    expect(signFlipTest(alike.map((d) => (d === 1 ? -1 : d)))).toMatchObject({
      greater: 2,
      twoSided: 4,
    });
  });

  it('turns a difference of 0 both ways at no change', () => {
    expect(signFlipTest([0, 3, 0, 5])).toEqual({ greater: 4, twoSided: 8, total: 16 });
    expect(signFlipTest([0, 0])).toEqual({ greater: 4, twoSided: 4, total: 4 });
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
