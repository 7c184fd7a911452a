import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { solveLinear, stationaryShares } from '../../src/statistics/linear-solve.ts';

describe('solveLinear', () => {
  it('solves a system whose first pivot is 0', () => {
    // By hand: y = 3, x + 2y + z = 10, 2x − z = −1 gives x = 1, z = 3.
    const matrix = Float64Array.of(0, 1, 0, 1, 2, 1, 2, 0, -1);
    expect([...solveLinear(matrix, Float64Array.of(3, 10, -1))]).toEqual([1, 3, 3]);
  });

  it('gives back what it was multiplied from', () => {
    fc.assert(
      fc.property(
        fc
          .integer({ min: 1, max: 8 })
          .chain((n) =>
            fc.tuple(
              fc.array(fc.integer({ min: -9, max: 9 }), { minLength: n * n, maxLength: n * n }),
              fc.array(fc.integer({ min: -9, max: 9 }), { minLength: n, maxLength: n }),
            ),
          ),
        ([entries, x]) => {
          const n = x.length;
          // A heavy diagonal keeps the system solvable and well conditioned.
          const matrix = Float64Array.from(entries, (v, i) => (i % (n + 1) === 0 ? v + 200 : v));
          const right = Float64Array.from(x, (_, i) =>
            x.reduce((sum, value, j) => sum + matrix[i * n + j] * value, 0),
          );
          const solved = solveLinear(matrix, right);
          x.forEach((value, i) => {
            expect(solved[i]).toBeCloseTo(value, 9);
          });
        },
      ),
    );
  });

  it('refuses equations that say the same twice', () => {
    expect(() => solveLinear(Float64Array.of(1, 2, 2, 4), Float64Array.of(1, 2))).toThrow(
      InputError,
    );
  });
});

describe('stationaryShares', () => {
  it('are those of the closed form for two states', () => {
    // Cover & Thomas 2006, example 4.1.1: b/(a + b) and a/(a + b).
    const shares = stationaryShares(Float64Array.of(0.9, 0.1, 0.3, 0.7), 2);
    expect(shares[0]).toBeCloseTo(0.75, 14);
    expect(shares[1]).toBeCloseTo(0.25, 14);
  });

  it('are 0 where the chain does not return, and level for a ring', () => {
    const left = stationaryShares(Float64Array.of(0.5, 0.5, 0, 0, 0, 1, 0, 1, 0), 3);
    expect(left[0]).toBe(0);
    expect(left[1]).toBeCloseTo(0.5, 14);
    expect(left[2]).toBeCloseTo(0.5, 14);
    const ring = stationaryShares(Float64Array.of(0, 1, 0, 0, 0, 1, 1, 0, 0), 3);
    for (const share of ring) expect(share).toBeCloseTo(1 / 3, 14);
  });

  it('do not exist where the chain has two parts that it cannot leave', () => {
    expect(() => stationaryShares(Float64Array.of(1, 0, 0, 1), 2)).toThrow(InputError);
  });
});
