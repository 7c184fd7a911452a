import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { digamma, logRisingFactorial, trigamma } from '../../src/entropy/gamma-functions.ts';

/** Euler's constant. */
const EULER = 0.577_215_664_901_532_9;

describe('digamma', () => {
  it('has the closed values of Abramowitz & Stegun 1964, 6.3.2 to 6.3.4', () => {
    let harmonic = 0;
    let odd = 0;
    for (let n = 1; n <= 60; n++) {
      expect(digamma(n)).toBeCloseTo(harmonic - EULER, 12);
      expect(digamma(n - 0.5)).toBeCloseTo(odd - EULER - 2 * Math.LN2, 12);
      harmonic += 1 / n;
      odd += 2 / (2 * n - 1);
    }
  });
});

describe('trigamma', () => {
  it('has the closed values of Abramowitz & Stegun 1964, 6.4.2 to 6.4.4', () => {
    let whole = Math.PI ** 2 / 6;
    let half = Math.PI ** 2 / 2;
    for (let n = 1; n <= 60; n++) {
      expect(trigamma(n)).toBeCloseTo(whole, 12);
      expect(trigamma(n - 0.5)).toBeCloseTo(half, 12);
      whole -= 1 / n ** 2;
      half -= 4 / (2 * n - 1) ** 2;
    }
  });
});

describe('logRisingFactorial', () => {
  it('is the sum of the logarithms', () => {
    const exponent = fc.double({ min: -30, max: 25, noNaN: true });
    fc.assert(
      fc.property(exponent, fc.nat(300), (power, n) => {
        const x = 10 ** power;
        let sum = 0;
        for (let i = 0; i < n; i++) sum += Math.log(x + i);
        const error = Math.abs(logRisingFactorial(x, n) - sum);
        expect(error).toBeLessThanOrEqual(1e-12 * (1 + Math.abs(sum)));
      }),
    );
  });
});
