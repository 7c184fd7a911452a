import { describe, expect, it } from 'vitest';
import { type TrustQuestion, trustIntervals } from '../../src/entropy/interval-trust.ts';

const order = (k: number, low: number, high: number, more: Partial<TrustQuestion> = {}) => ({
  k,
  low,
  high,
  estimable: true,
  positions: 10_000,
  units: 256,
  ...more,
});

const trusted = (orders: readonly TrustQuestion[], changes = false) =>
  trustIntervals(orders, changes).map((verdict) => verdict.intervalTrusted);

describe('trustIntervals', () => {
  it('trusts estimable orders that agree', () => {
    expect(trusted([order(0, 1, 1.2), order(1, 0.95, 1.15)])).toEqual([true, true]);
  });

  it('does not trust an order below which the next one lies with its whole interval', () => {
    const verdicts = trustIntervals([order(0, 1, 1.2), order(1, 0.8, 0.9)], false);
    expect(verdicts.map((v) => v.intervalTrusted)).toEqual([false, true]);
    expect(verdicts[0].intervalReason).toMatch(/order 1 lies below .* order 0 is not enough/);
  });

  it('gives nothing on a next order that is not estimable, and does not trust that one', () => {
    const verdicts = trustIntervals(
      [order(0, 1, 1.2), order(1, 0.1, 0.2, { estimable: false })],
      false,
    );
    expect(verdicts.map((v) => v.intervalTrusted)).toEqual([true, false]);
    expect(verdicts[1].intervalReason).toBe('order 1 is not estimable');
  });

  it('needs thirty units, 800 positions, and a source that stays the same', () => {
    expect(trusted([order(0, 1, 1.2, { positions: 799 })])).toEqual([false]);
    expect(trusted([order(0, 1, 1.2, { positions: 800 })])).toEqual([true]);
    expect(trusted([order(0, 1, 1.2, { units: 29 })])).toEqual([false]);
    expect(trusted([order(0, 1, 1.2, { units: 30 })])).toEqual([true]);
    expect(trusted([order(0, 1, 1.2)], true)).toEqual([false]);
  });
});
