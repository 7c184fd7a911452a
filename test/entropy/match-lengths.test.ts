import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { entropyByOrder } from '../../src/entropy/entropy-by-order.ts';
import { matchLengthEntropy } from '../../src/entropy/match-lengths.ts';
import { measureMatches } from '../../src/entropy/match-measurements.ts';
import { BugError } from '../../src/errors/errors.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { oneMessage, type SymbolArray } from '../../src/symbols/sequence.ts';

const LENGTH = 50_000;

function estimate(symbols: SymbolArray, alphabetSize: number) {
  const sequence = oneMessage(symbols, alphabetSize);
  const entropy = entropyByOrder(sequence, { upto: 4, contexts: 'running' });
  return { entropy, matches: matchLengthEntropy(sequence, entropy) };
}

/** A sequence of {@link LENGTH} symbols, each by `next` from what came before and a seeded real draw. */
function drawn(seed: number, next: (symbols: Uint8Array, i: number, real: () => number) => number) {
  const generator = new SeededGenerator(seed);
  const symbols = new Uint8Array(LENGTH);
  const real = (): number => generator.real();
  for (let i = 0; i < LENGTH; i++) symbols[i] = next(symbols, i, real);
  return symbols;
}

const binaryEntropy = (p: number): number => -p * Math.log2(p) - (1 - p) * Math.log2(1 - p);

describe('the published figure', () => {
  it('is 1 ÷ the mean of Λ ÷ log2(i + 1), by a plain search', () => {
    const text = fc.array(fc.nat(3), { minLength: 2, maxLength: 60 });
    fc.assert(
      fc.property(text, (symbols) => {
        let sum = 0;
        for (let i = 1; i < symbols.length; i++) {
          let longest = 0;
          for (let j = 0; j < i; j++) {
            let length = 0;
            while (
              j + length < i &&
              i + length < symbols.length &&
              symbols[j + length] === symbols[i + length]
            ) {
              length++;
            }
            longest = Math.max(longest, length);
          }
          sum += (longest + 1) / Math.log2(i + 1);
        }
        const { matches } = estimate(Uint8Array.from(symbols), 4);
        expect(matches.publishedBitsPerSymbol).toBeCloseTo((symbols.length - 1) / sum, 10);
      }),
    );
  });
});

describe('the estimate', () => {
  // Rates of closed form. The tolerance is 5 %: the published figure misses each of them by more on the low side.
  it.each([
    ['a fair coin', 1, 2, drawn(1, (_, __, real) => (real() < 0.5 ? 1 : 0))],
    ['a coin of 0.1', binaryEntropy(0.1), 2, drawn(2, (_, __, real) => (real() < 0.1 ? 1 : 0))],
    ['16 equal symbols', 4, 16, drawn(3, (_, __, real) => Math.floor(16 * real()))],
    [
      'a chain that stays with 0.9',
      binaryEntropy(0.1),
      2,
      drawn(4, (s, i, real) => (real() < 0.1 ? 1 - (s[i - 1] ?? 0) : (s[i - 1] ?? 0))),
    ],
  ] as const)('takes the bias out: %s', (_, rate, alphabetSize, symbols) => {
    const { matches } = estimate(symbols, alphabetSize);
    expect(matches.valid).toBe(true);
    expect(matches.publishedBitsPerSymbol).toBeLessThan(0.95 * rate);
    expect(Math.abs(matches.bitsPerSymbol / rate - 1)).toBeLessThan(0.05);
    expect(matches.low).toBeLessThan(matches.bitsPerSymbol);
    expect(matches.high).toBeGreaterThanOrEqual(matches.bitsPerSymbol);
  });

  it('sees what no order counted sees: a symbol that repeats the one 24 places before', () => {
    const symbols = drawn(5, (s, i, real) =>
      i < 24 || real() < 0.02 ? Math.floor(4 * real()) : s[i - 24],
    );
    const { entropy, matches } = estimate(symbols, 4);
    expect(matches.valid).toBe(true);
    expect(matches.high).toBeLessThan(entropy.orders[entropy.largestEstimable].low);
    // Rate: an error in 50 of which a quarter is none: the binary entropy of 0.015 and log2 3 for each error.
    expect(matches.low).toBeGreaterThan(binaryEntropy(0.015) + 0.015 * Math.log2(3));
  });

  it('adds bits up over blocks: noise and a copy of it cost half of what noise costs', () => {
    const noise = drawn(6, (_, __, real) => Math.floor(16 * real()));
    noise.copyWithin(LENGTH / 2, 0, LENGTH / 2);
    const { matches } = estimate(noise, 16);
    expect(matches.publishedBitsPerSymbol).toBeLessThan(0.01);
    expect(Math.abs(matches.bitsPerSymbol - 2)).toBeLessThan(0.15);
    expect(matches.low).toBeLessThan(2);
    expect(matches.high).toBeGreaterThan(2);
  });
});

describe('degenerate input', () => {
  it.each([
    ['nothing', new Uint8Array(0), 256, 'too few symbols'],
    ['one symbol', Uint8Array.of(1), 256, 'too few symbols'],
    ['two symbols', Uint8Array.of(1, 1), 2, 'too few symbols'],
    [
      'all different',
      Uint16Array.from({ length: 20_000 }, (_, i) => 3 * i + 1),
      65_536,
      'no order is estimable',
    ],
  ] as const)('is not stated, with all of log2 m as its interval: %s', (_, symbols, m, reason) => {
    const { matches } = estimate(symbols, m);
    expect(matches).toMatchObject({ valid: false, low: 0, high: Math.log2(m) });
    expect(matches.reason).toContain(reason);
    expect(Number.isFinite(matches.bitsPerSymbol)).toBe(true);
  });

  it('is 0 for constant data, also of an alphabet of 1', () => {
    for (const alphabetSize of [1, 256]) {
      const { matches } = estimate(new Uint8Array(5000), alphabetSize);
      expect(matches).toMatchObject({ valid: true, bitsPerSymbol: 0, low: 0, high: 0 });
    }
  });

  it('does not look at message ends', () => {
    const symbols = drawn(8, (_, __, real) => Math.floor(4 * real()));
    const ends = Uint32Array.from({ length: LENGTH / 5 }, (_, m) => 5 * (m + 1));
    const own = measureMatches(oneMessage(symbols, 4), 2);
    expect(measureMatches({ symbols, alphabetSize: 4, messageEnds: ends }, 2)).toEqual(own);
  });
});

describe('long sequences', () => {
  it('are judged by their start and their end, which is said', () => {
    const symbols = drawn(9, (_, __, real) => (real() < 0.5 ? 1 : 0));
    const sequence = oneMessage(symbols, 2);
    const entropy = entropyByOrder(sequence, { upto: 2, contexts: 'running' });
    const measured = measureMatches(sequence, entropy.largestEstimable, 10_000);
    const pieces = [symbols.subarray(0, 10_000), symbols.subarray(40_000)].map((piece) =>
      measureMatches(oneMessage(piece, 2), -1),
    );
    expect(measured.symbolsUsed).toBe(20_000);
    expect(measured.components).toBe(pieces[0].components + pieces[1].components);
    expect(measured.matchSum).toBe(pieces[0].matchSum + pieces[1].matchSum);
    const matches = matchLengthEntropy(sequence, entropy, measured);
    expect(matches.reason).toContain('in 20000 of 50000 symbols');
    expect(Math.abs(matches.bitsPerSymbol - 1)).toBeLessThan(0.05);
  });

  it.each([9_999, 10_000, 10_001])('are cut only above the limit: %d symbols', (length) => {
    const sequence = oneMessage(new Uint8Array(length), 2);
    expect(measureMatches(sequence, 0, 10_000).symbolsUsed).toBe(Math.min(length, 10_000));
  });
});

it('asks for the twin of the order that is estimable', () => {
  const sequence = oneMessage(new Uint8Array(100), 2);
  const entropy = entropyByOrder(sequence, { upto: 1, contexts: 'running' });
  expect(() => matchLengthEntropy(sequence, entropy, measureMatches(sequence, 0))).toThrow(
    BugError,
  );
});
