import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';

describe('SeededGenerator', () => {
  it('gives the number that the library documents for its Alea generator', () => {
    // Reference for the wrapping: seedrandom 3.0.5, its readme, "Other fast PRNG algorithms".
    expect(new SeededGenerator('hello.').real()).toBe(0.4783254903741181);
  });

  it('repeats itself for one seed, whether a number or its text, and not for another', () => {
    const draw = (seed: number | string) => {
      const generator = new SeededGenerator(seed);
      return Array.from({ length: 20 }, () => generator.integer(0, 1_000_000));
    };
    expect(draw(7)).toEqual(draw('7'));
    expect(draw(7)).not.toEqual(draw(8));
  });

  it('stays within any range', () => {
    fc.assert(
      fc.property(
        fc.integer(),
        fc.integer({ min: -(2 ** 40), max: 2 ** 40 }),
        fc.integer({ min: 0, max: 2 ** 32 - 1 }),
        (seed, low, spread) => {
          const value = new SeededGenerator(seed).integer(low, low + spread);
          return Number.isInteger(value) && value >= low && value <= low + spread;
        },
      ),
    );
  });

  it('draws every value of a range about equally often', () => {
    // A span just above 2^31 would favour its lower part two to one if draws were only reduced.
    const generator = new SeededGenerator(3);
    const draws = 20_000;
    let lower = 0;
    for (let i = 0; i < draws; i++) if (generator.integer(0, 3 * 2 ** 30 - 1) < 2 ** 30) lower++;
    // Binomial(20 000, 1/3): five standard deviations are 333.
    expect(Math.abs(lower - draws / 3)).toBeLessThan(5 * Math.sqrt((draws * 2) / 9));
  });

  it.each([
    [2, 1],
    [0.5, 3],
    [0, 2 ** 32],
    [0, Number.POSITIVE_INFINITY],
  ])('refuses the range %d to %d', (low, high) => {
    expect(() => new SeededGenerator(1).integer(low, high)).toThrow(InputError);
  });
});
