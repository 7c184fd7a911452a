import fc from 'fast-check';
import { expect, it } from 'vitest';
import { integrateWeighted } from '../../src/entropy/nsb-integral.ts';

it('has the moments of a normal law of any width, wherever it lies', () => {
  const centre = fc.double({ min: -30, max: 30, noNaN: true });
  const width = fc.double({ min: -4, max: 0.3, noNaN: true }).map((power) => 10 ** power);
  fc.assert(
    fc.property(centre, width, (mean, deviation) => {
      const weight = (t: number): number => -(((t - mean) / deviation) ** 2) / 2;
      const first = integrateWeighted(weight, (t) => t, -60, 60);
      const second = integrateWeighted(weight, (t) => (t - mean) ** 2, -60, 60);
      expect(Math.abs(first - mean)).toBeLessThan(1e-9 * Math.max(1, deviation));
      expect(Math.abs(second / deviation ** 2 - 1)).toBeLessThan(1e-9);
    }),
  );
});
