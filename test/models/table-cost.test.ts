import { describe, expect, it } from 'vitest';
import { COST_PER_BIT, integerLog2, tableCosts } from '../../src/models/table-cost.ts';

describe('integerLog2', () => {
  it('is the logarithm, rounded down, off by at most one unit', () => {
    const values = Array.from({ length: 20_000 }, (_, i) => i + 1);
    for (let value = 3; value < 2 ** 25; value = Math.floor(value * 1.37) + 1) values.push(value);
    for (const value of values) {
      const exact = COST_PER_BIT * Math.log2(value);
      expect(integerLog2(value)).toBeLessThanOrEqual(exact + 1e-6);
      expect(integerLog2(value)).toBeGreaterThan(exact - 2);
    }
  });

  it('is exact for powers of two', () => {
    for (let bits = 0; bits <= 25; bits++) expect(integerLog2(2 ** bits)).toBe(bits * COST_PER_BIT);
  });

  it('prices certain and rarest frequencies', () => {
    const costs = tableCosts();
    expect(costs[2 ** 14]).toBe(0);
    expect(costs[2 ** 13]).toBe(COST_PER_BIT);
    expect(costs[1]).toBe(14 * COST_PER_BIT);
  });
});
