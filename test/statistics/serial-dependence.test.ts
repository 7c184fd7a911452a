import { describe, expect, it } from 'vitest';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { neighboursLeanAlike } from '../../src/statistics/serial-dependence.ts';

describe('neighboursLeanAlike', () => {
  it('finds trends and slow swings, and neither turns nor what is even', () => {
    const of = (n: number, value: (i: number) => number) =>
      neighboursLeanAlike(Array.from({ length: n }, (_, i) => value(i)));
    expect(of(24, (i) => i)).toBe(true);
    expect(of(24, (i) => -3 * i)).toBe(true);
    expect(of(24, (i) => (i < 12 ? 0 : 1))).toBe(true);
    expect(of(24, (i) => (i % 2 === 0 ? 0 : 1))).toBe(false);
    expect(of(24, () => 5)).toBe(false);
    expect(of(24, (i) => 0.1 + i * 1e-17)).toBe(false);
    expect(of(7, (i) => i)).toBe(false);
    expect(of(0, (i) => i)).toBe(false);
  });

  it('holds just above its bound: serial correlation −1/n + 2.326/√n', () => {
    const n = 9;
    const bound = -1 / n + 2.326 / Math.sqrt(n);
    // 1, 1, 1, 1, 0, −1, −1, −1, −1: six products of 1 by eight squares are 0.75.
    expect(6 / 8).toBeGreaterThan(bound);
    expect(neighboursLeanAlike([1, 1, 1, 1, 0, -1, -1, -1, -1])).toBe(true);
    // 1, 1, 1, 0, 0, 0, −1, −1, −1: four by six are 0.667, just above.
    expect(4 / 6).toBeGreaterThan(bound);
    expect(neighboursLeanAlike([1, 1, 1, 0, 0, 0, -1, -1, -1])).toBe(true);
    // 2, 1, 1, 0, 0, 0, −1, −1, −2: six by twelve are 0.5, below.
    expect(6 / 12).toBeLessThan(bound);
    expect(neighboursLeanAlike([2, 1, 1, 0, 0, 0, -1, -1, -2])).toBe(false);
  });

  it('is rare among independent values', () => {
    const generator = new SeededGenerator('independent');
    for (const n of [8, 24]) {
      const trials = 3000;
      let found = 0;
      for (let trial = 0; trial < trials; trial++) {
        const values = Array.from({ length: n }, () => generator.real() + generator.real());
        if (neighboursLeanAlike(values)) found++;
      }
      // 1 % by the normal law, and three standard errors of it.
      expect(found / trials).toBeLessThan(0.01 + 3 * Math.sqrt((0.01 * 0.99) / trials));
    }
  });
});
