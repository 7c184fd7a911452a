import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { ACCOUNT_LINES, bitAccount, type CodedTotals } from '../../src/account/bit-account.ts';
import { BugError } from '../../src/errors/errors.ts';

const integers = fc.record({
  writtenBits: fc.nat(1e9),
  endingBits: fc.nat(1e6),
  paddingBits: fc.nat(1e6),
  tableBits: fc.nat(1e6),
  indexBits: fc.nat(1e6),
  framingBits: fc.nat(1e6),
  checkBits: fc.nat(1e6),
});

const carriedOf = (t: Record<string, number>): number =>
  Object.values(t).reduce((a, b) => a + b, 0);

describe('the bit account', () => {
  it('sums to the carried bits, whatever is known of ideal and fit', () => {
    fc.assert(
      fc.property(
        integers,
        fc.double({ min: 0, max: 1e9, noNaN: true }),
        fc.option(fc.double({ min: 0, max: 1e9, noNaN: true })),
        fc.option(fc.double({ min: 0, max: 1e9, noNaN: true })),
        fc.double({ min: 0, max: 1e9, noNaN: true }),
        fc.double({ min: 0, max: 1e6, noNaN: true }),
        (parts, payloadBits, ideal, fit, floorBits, openingBits) => {
          const totals: CodedTotals = {
            ...parts,
            payloadBits,
            carriedBits: carriedOf(parts),
            ...(ideal === null ? {} : { idealBits: ideal }),
            ...(ideal === null || fit === null ? {} : { fitBits: fit }),
          };
          const account = bitAccount(totals, { floorBits, openingBits });
          const sum = ACCOUNT_LINES.reduce((total, line) => total + (account[line] ?? 0), 0);
          // Twelve lines, each rounded to 10⁻³ bit.
          expect(Math.abs(sum - totals.carriedBits)).toBeLessThan(12 * 0.0005 + 1e-6 * 10);
          expect('structure' in account).toBe(ideal !== null && fit !== null);
          expect('model' in account).toBe(ideal !== null && fit === null);
          expect('above_floor' in account).toBe(ideal === null);
        },
      ),
    );
  });

  it('splits a worked case by hand', () => {
    // 1000 symbols at a floor of 3 bits; fit 3200, ideal 3350, payload 3401; 8 bits of ending, 3 of padding, written 3393.
    const account = bitAccount(
      {
        writtenBits: 3393,
        endingBits: 8,
        paddingBits: 3,
        tableBits: 120,
        indexBits: 0,
        framingBits: 16,
        checkBits: 0,
        carriedBits: 3540,
        payloadBits: 3401,
        idealBits: 3350,
        fitBits: 3200,
      },
      { floorBits: 3000, openingBits: 20 },
    );
    expect(account).toEqual({
      floor: 3000,
      opening: 20,
      structure: 180,
      learning: 150,
      rounding: 51,
      tables: 120,
      index: 0,
      framing: 16,
      ends: 3,
      check: 0,
    });
  });

  it('refuses integers that do not sum to what was carried', () => {
    fc.assert(
      fc.property(integers, fc.integer({ min: 1, max: 1000 }), (parts, off) => {
        const totals = { ...parts, payloadBits: 0, carriedBits: carriedOf(parts) + off };
        expect(() => bitAccount(totals, { floorBits: 0, openingBits: 0 })).toThrow(BugError);
      }),
    );
  });
});
