import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { floorOf, openingBits } from '../../src/entropy/floor.ts';
import { BugError } from '../../src/errors/errors.ts';

const order = (k: number, corrected: number, low: number, estimable = true) => ({
  k,
  corrected,
  low,
  estimable,
});
const orders = [order(0, 4, 3.9), order(1, 3, 2.8), order(2, 2.5, 2.2), order(3, 1, 0.9, false)];

describe('floorOf', () => {
  it('takes the largest estimable order where no ceiling lies below it', () => {
    const ceilings = [
      { name: 'fixed', bitsPerSymbol: 8 },
      { name: 'arith:order=2', bitsPerSymbol: 2.7 },
    ];
    expect(floorOf({ orders, ceilings })).toEqual({
      point: 2.5,
      low: 2.2,
      high: 2.7,
      method: 'corrected entropy of order 2 (Miller–Madow)',
      cut: false,
      order: 2,
    });
  });

  it('is cut by a ceiling below it; then all orders counted say how far down it may lie', () => {
    expect(floorOf({ orders, ceilings: [{ name: 'arith:order=4', bitsPerSymbol: 2 }] })).toEqual({
      point: 2,
      low: 0.9,
      high: 2,
      method: 'what arith:order=4 reaches, below the corrected entropy of order 2',
      cut: true,
      order: 2,
    });
  });

  it('keeps the lower half of the interval where the ceiling lies within it', () => {
    const floor = floorOf({ orders, ceilings: [{ name: 'x', bitsPerSymbol: 2.25 }] });
    expect(floor).toMatchObject({ point: 2.25, high: 2.25, cut: true });
    expect(floor.low).toBeCloseTo(2.25 - 0.3, 12);
  });

  it('is the ceiling where no order is estimable, above the least of what was counted', () => {
    const unknown = [order(0, 4, 3.9, false)];
    expect(floorOf({ orders: unknown, ceilings: [{ name: 'fixed', bitsPerSymbol: 8 }] })).toEqual({
      point: 8,
      low: 3.9,
      high: 8,
      method: 'what fixed reaches, since no order is estimable',
      cut: false,
      order: -1,
    });
  });

  describe('with match lengths', () => {
    const fixed = [{ name: 'fixed', bitsPerSymbol: 8 }];
    const matches = { bitsPerSymbol: 2, low: 1.8, high: 2.2, valid: true };

    it('takes them where their interval lies below the corrected entropy', () => {
      expect(floorOf({ orders, ceilings: fixed, matches })).toEqual({
        point: 2,
        low: 1.8,
        high: 8,
        method:
          'match lengths, flagged (their interval holds chance, not bias), below the corrected entropy of order 2',
        cut: false,
        order: 2,
      });
    });

    it('leaves the point where it is while their interval reaches the corrected entropy', () => {
      const near = { ...matches, bitsPerSymbol: 2.4, low: 2.1, high: 2.6 };
      const floor = floorOf({ orders, ceilings: fixed, matches: near });
      expect(floor).toMatchObject({ point: 2.5, low: 2.1 });
      expect(floor.method).toContain('corrected entropy of order 2');
    });

    it('takes their interval, not all orders, where a ceiling lies within it', () => {
      const floor = floorOf({ orders, ceilings: [{ name: 'x', bitsPerSymbol: 1.9 }], matches });
      // The lower half of their interval, 0.2 bits, stands below the ceiling.
      expect(floor).toMatchObject({ point: 1.9, low: expect.closeTo(1.7, 12), high: 1.9 });
      expect(floor.method).toContain('what x reaches');
      expect(
        floorOf({ orders, ceilings: [{ name: 'x', bitsPerSymbol: 2.3 }], matches }),
      ).toMatchObject({ point: 2, low: 1.8, high: 2.3, cut: true });
    });

    it('falls back to all orders where their interval too lies above the ceiling', () => {
      const ceilings = [{ name: 'x', bitsPerSymbol: 1.5 }];
      expect(floorOf({ orders, ceilings, matches })).toMatchObject({ point: 1.5, low: 0.9 });
    });

    it('does not use them where they are not valid', () => {
      const without = floorOf({ orders, ceilings: fixed });
      expect(floorOf({ orders, ceilings: fixed, matches: { ...matches, valid: false } })).toEqual(
        without,
      );
    });
  });

  it('keeps low ≤ point ≤ high, and is asked for a ceiling', () => {
    const rate = fc.double({ min: 0, max: 8, noNaN: true });
    const anyOrders = fc.array(fc.tuple(rate, rate, fc.boolean()), { maxLength: 5 });
    const anyMatches = fc.option(
      fc.record({ bitsPerSymbol: rate, low: rate, high: rate, valid: fc.boolean() }).map((m) => {
        const [low, bitsPerSymbol, high] = [m.low, m.bitsPerSymbol, m.high].sort((a, b) => a - b);
        return { low, bitsPerSymbol, high, valid: m.valid };
      }),
      { nil: undefined },
    );
    fc.assert(
      fc.property(
        anyOrders,
        fc.array(rate, { minLength: 1 }),
        anyMatches,
        (list, rates, matches) => {
          const floor = floorOf({
            matches,
            orders: list.map(([a, b, e], k) => order(k, Math.max(a, b), Math.min(a, b), e)),
            ceilings: rates.map((bitsPerSymbol) => ({ name: 'x', bitsPerSymbol })),
          });
          expect(floor.high).toBe(Math.min(...rates));
          expect(floor.point).toBeLessThanOrEqual(floor.high);
          expect(floor.low).toBeLessThanOrEqual(floor.point);
        },
      ),
    );
    expect(() => floorOf({ orders, ceilings: [] })).toThrow(BugError);
  });
});

describe('openingBits', () => {
  it('sums H_j − H_k over the first symbols of each message', () => {
    const lengths = fc.array(fc.nat(6), { maxLength: 20 });
    fc.assert(
      fc.property(lengths, fc.integer({ min: -1, max: 3 }), (list, k) => {
        let expected = 0;
        for (const length of list) {
          for (let j = 0; j < k && j < length; j++) {
            expected += orders[j].corrected - orders[k].corrected;
          }
        }
        let end = 0;
        const messageEnds = Uint32Array.from(list, (length) => {
          end += length;
          return end;
        });
        const sequence = { alphabetSize: 256, symbols: new Uint8Array(end), messageEnds };
        expect(openingBits(sequence, orders, k, 'message')).toBeCloseTo(expected, 9);
        expect(openingBits(sequence, orders, k, 'running')).toBe(0);
      }),
    );
  });
});
