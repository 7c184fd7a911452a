import { describe, expect, it } from 'vitest';
import { resolvedDifference, symbolsToResolve } from '../../src/entropy/data-needed.ts';
import {
  rateByTrainingSize,
  timedParts,
  trainToTest,
} from '../../src/entropy/data-needed-training.ts';
import { InputError } from '../../src/errors/errors.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';
import { addOneCoder } from './stand-in-coder.ts';

function bits(seed: string, n: number, p: (i: number) => number): Uint8Array {
  const generator = new SeededGenerator(seed);
  return Uint8Array.from({ length: n }, (_, i) => (generator.real() < p(i) ? 1 : 0));
}

describe('symbolsToResolve', () => {
  it('agrees with the rule of 8 variances over the squared difference', () => {
    // n = 8 s² ÷ d² pairs for 80 % power at 5 %: common practice, no source; (1.96 + 0.84)² is 7.85.
    const s = 1.7;
    const symbols = 10_000;
    const needed = symbolsToResolve({ symbols, standardError: s / Math.sqrt(symbols) }, 0.02);
    expect(needed).toBeGreaterThan((7.8 * s * s) / 0.02 ** 2);
    expect(needed).toBeLessThan((8 * s * s) / 0.02 ** 2);
  });

  it('is seen four times in five where a normal difference has just that size', () => {
    // Simulation as the second computation: sums of 12 uniforms less 6 are normal to well within what is asked here.
    const generator = new SeededGenerator(5);
    const difference = resolvedDifference({ symbols: 1, standardError: 1 });
    let seen = 0;
    for (let r = 0; r < 10_000; r++) {
      let draw = difference - 6;
      for (let i = 0; i < 12; i++) draw += generator.real();
      if (draw > 1.96) seen++;
    }
    // Four standard errors of a share of 0.8 in 10 000.
    expect(Math.abs(seen / 10_000 - 0.8)).toBeLessThan(0.016);
  });

  it('needs nothing more where nothing varies, and refuses no difference', () => {
    expect(symbolsToResolve({ symbols: 50, standardError: 0 }, 0.1)).toBe(0);
    for (const difference of [0, -1, Number.NaN, Number.POSITIVE_INFINITY]) {
      expect(() => symbolsToResolve({ symbols: 50, standardError: 1 }, difference)).toThrow(
        InputError,
      );
    }
  });
});

describe('rateByTrainingSize', () => {
  const options = { order: 0, contexts: 'running' as const, coder: addOneCoder(0) };

  it('prices the test part by counts of the train part nearest to it, as a plain count does', () => {
    const symbols = bits('sizes', 4000, () => 0.2);
    const found = rateByTrainingSize(timedParts(oneMessage(symbols, 2), undefined), options)!;
    expect(found.sizes.map((s) => s.trainSymbols)).toEqual([20, 60, 200, 600, 2000]);
    expect(found.pricedSymbols).toBe(2000);
    for (const { trainSymbols, rate } of found.sizes) {
      const train = symbols.subarray(2000 - trainSymbols, 2000);
      const ones = train.reduce((sum, bit) => sum + bit, 0);
      const p = (ones + 1) / (trainSymbols + 2);
      const inTest = symbols.subarray(2000).reduce((sum, bit) => sum + bit, 0);
      const expected = -(inTest * Math.log2(p) + (2000 - inTest) * Math.log2(1 - p)) / 2000;
      expect(rate).toBeCloseTo(expected, 10);
    }
  });

  it('says from where on more data stop helping, and that they still help', () => {
    const easy = rateByTrainingSize(
      timedParts(
        oneMessage(
          bits('easy', 200_000, () => 0.3),
          2,
        ),
        undefined,
      ),
      options,
    )!;
    // Learning one probability from n symbols costs about 1 ÷ (2 n ln 2) bits a symbol: 0.0007 at 1000 symbols.
    expect(easy.enoughSymbols).toBeLessThanOrEqual(100_000);
    const generator = new SeededGenerator('hard');
    const table = Uint16Array.from({ length: 4096 }, () => generator.integer(0, 255));
    let at = 0;
    // A walk over 4096 pairs, each with one likely successor: at 2500 symbols most pairs are still new.
    const symbols = Uint8Array.from({ length: 5000 }, () => {
      at = generator.real() < 0.9 ? (at * 16 + table[at]) % 4096 : generator.integer(0, 4095);
      return at % 64;
    });
    const hard = rateByTrainingSize(timedParts(oneMessage(symbols, 64), undefined), {
      order: 2,
      contexts: 'running',
    })!;
    expect(hard.enoughSymbols).toBeUndefined();
    expect(hard.sizes.at(-1)!.saving!.rate).toBeGreaterThan(0);
  });

  it.each([0, 1, 127, 254])('has nothing to say of %i symbols', (length) => {
    const parts = timedParts(oneMessage(new Uint8Array(length), 2), undefined);
    expect(rateByTrainingSize(parts, options)).toBeUndefined();
    if (length < 254) expect(trainToTest(parts, options)).toBeUndefined();
  });
});

describe('trainToTest', () => {
  const options = { order: 0, contexts: 'running' as const };

  it('finds the divergence of two sources, by the closed form', () => {
    // D(0.4 ‖ 0.1) = 0.4 log2 4 + 0.6 log2 (0.6/0.9) = 0.449 bits; learning cancels.
    const train = oneMessage(
      bits('old', 50_000, () => 0.1),
      2,
    );
    const test = oneMessage(
      bits('new', 100_000, () => 0.4),
      2,
    );
    const found = trainToTest({ train, test }, options)!;
    expect(found.trainSymbols).toBe(50_000);
    expect(found.pricedSymbols).toBe(50_000);
    const divergence = 0.4 * Math.log2(4) + 0.6 * Math.log2(0.6 / 0.9);
    expect(Math.abs(found.excess - divergence)).toBeLessThan(4 * found.standardError + 0.005);
  });

  it('finds nothing beyond its error where nothing changes', () => {
    const all = oneMessage(
      bits('same', 100_000, () => 0.3),
      2,
    );
    const found = trainToTest(timedParts(all, undefined), options)!;
    expect(Math.abs(found.excess)).toBeLessThan(4 * found.standardError);
  });
});
