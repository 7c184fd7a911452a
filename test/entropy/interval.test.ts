import fc from 'fast-check';
import { sampleStandardDeviation } from 'simple-statistics';
import { describe, expect, it } from 'vitest';
import { correctedInterval, rareBits } from '../../src/entropy/interval.ts';
import { intervalUnits } from '../../src/entropy/interval-units.ts';
import { millerMadow } from '../../src/entropy/miller-madow.ts';
import { markovSource } from '../../src/harness/calibrate-markov.ts';
import type { CalibrationSource } from '../../src/harness/calibrate-source.ts';
import { countContexts, type OrderCounts } from '../../src/models/context-counts.ts';
import { talliesOf } from '../../src/models/context-counts-tallies.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { newSymbolArray, oneMessage, type SymbolArray } from '../../src/symbols/sequence.ts';

const chain = (rows: readonly (readonly number[])[]): CalibrationSource =>
  markovSource({
    name: '',
    description: '',
    alphabetSize: rows[0].length,
    order: rows.length === 1 ? 0 : 1,
    law: Float64Array.from(rows.flat()),
  });

function intervalOf(symbols: SymbolArray, alphabetSize: number, k: number) {
  const sequence = oneMessage(symbols, alphabetSize);
  const units = intervalUnits(sequence);
  const counts = countContexts(sequence, { upto: k, contexts: 'running', blocks: units.ends })[k];
  return correctedInterval(counts, millerMadow.estimate(counts), alphabetSize, units);
}

/** Σ c log2 c. */
const weighted = (counts: readonly number[]) =>
  counts.reduce((sum, c) => sum + (c === 0 ? 0 : c * Math.log2(c)), 0);

describe('correctedInterval', () => {
  it('is as wide as drawn resamples scatter, each counted anew', () => {
    // Units of a two-state chain, drawn in runs as Politis & Romano 1994 describe; every resample has its own pair counts
    // and its own plug-in entropy.
    const source = chain([
      [0.9, 0.1],
      [0.3, 0.7],
    ]);
    const symbols = source.draw(10_000, 'recounted');
    const { ends } = intervalUnits(oneMessage(symbols, 2));
    const pairs = Array.from(ends, () => [0, 0, 0, 0]);
    for (let i = 1, unit = 0; i < symbols.length; i++) {
      while (ends[unit] <= i - 1) unit++;
      pairs[unit][2 * symbols[i - 1] + symbols[i]]++;
    }
    const generator = new SeededGenerator('resamples');
    const meanRun = Math.cbrt(ends.length);
    const entropies = Array.from({ length: 4000 }, () => {
      const counts = [0, 0, 0, 0];
      let unit = 0;
      for (let u = 0; u < ends.length; u++) {
        unit =
          u === 0 || generator.real() < 1 / meanRun
            ? generator.integer(0, ends.length - 1)
            : (unit + 1) % ends.length;
        for (let p = 0; p < 4; p++) counts[p] += pairs[unit][p];
      }
      const contexts = [counts[0] + counts[1], counts[2] + counts[3]];
      return (weighted(contexts) - weighted(counts)) / (contexts[0] + contexts[1]);
    });
    const { low, high } = intervalOf(symbols, 2, 1);
    // A run of mean length r takes the share 1/B Σ (1 − d/B)(1 − 1/r)^|d| of the variance for centring, and leaves
    // B ÷ Σ (…)² − 1 degrees of freedom; at 43 of them, 95 % of Student's law lie within 2.017 (from memory of the tables).
    let weights = 1;
    for (let d = 1; d < 256; d++) weights += 2 * (1 - d / 256) * (1 - 1 / meanRun) ** d;
    const expected = (2.017 * sampleStandardDeviation(entropies)) / Math.sqrt(1 - weights / 256);
    // A spread of 4000 resamples is known to 1.1 %: four of those.
    expect(Math.abs((high - low) / 2 / expected - 1)).toBeLessThan(0.045);
  });

  it('stays within 0 and log2 m, and around what is estimated', () => {
    const sequences = fc
      .constantFrom(1, 2, 3, 256, 65_536)
      .chain((m) =>
        fc.tuple(
          fc.constant(m),
          fc.array(fc.integer({ min: 0, max: Math.min(m - 1, 5) }), { maxLength: 400 }),
          fc.integer({ min: 0, max: 3 }),
        ),
      );
    fc.assert(
      fc.property(sequences, ([m, list, k]) => {
        const symbols = newSymbolArray(m, list.length);
        symbols.set(list);
        const counts = countContexts(oneMessage(symbols, m), { upto: k, contexts: 'running' })[k];
        const { low, high } = intervalOf(symbols, m, k);
        const middle = Math.min(Math.log2(m), millerMadow.estimate(counts));
        expect(low).toBeGreaterThanOrEqual(0);
        expect(low).toBeLessThanOrEqual(middle + 1e-12);
        expect(high).toBeGreaterThanOrEqual(middle - 1e-12);
        expect(high).toBeLessThanOrEqual(Math.log2(m));
      }),
    );
  });

  it('knows nothing of fewer than two positions', () => {
    expect(intervalOf(new Uint8Array(0), 256, 0)).toMatchObject({ low: 0, high: 8, units: 0 });
    expect(intervalOf(new Uint8Array(1), 256, 0)).toMatchObject({ low: 0, high: 8, units: 1 });
    expect(intervalOf(new Uint8Array(3), 256, 2)).toMatchObject({ low: 0, high: 8, units: 1 });
    const distinct = newSymbolArray(65_536, 65_536).map((_, i) => i);
    expect(intervalOf(distinct, 65_536, 0).high).toBe(16);
  });

  it('leaves room for what equal symbols may hide', () => {
    // A share p of ones leaves 900 zeros with probability (1 − p)^900 = 0.025 at p = 0.0040904; the rest is arithmetic.
    const p = 0.00409036;
    const bits = -p * Math.log2(p) - (1 - p) * Math.log2(1 - p);
    const { low, high } = intervalOf(new Uint8Array(900), 2, 0);
    expect(low).toBe(0);
    expect(high).toBeCloseTo(bits, 6);
    expect(intervalOf(new Uint8Array(900), 256, 0).high).toBeCloseTo(bits + p * Math.log2(255), 5);
    expect(intervalOf(new Uint8Array(900), 1, 1)).toMatchObject({ low: 0, high: 0 });
  });

  // Where symbols carry nearly the same information, the first and the second order of the spread are of one size.
  it.each<[string, CalibrationSource]>([
    ['a bit of 0.49', chain([[0.49, 0.51]])],
    ['a bit of 0.48', chain([[0.48, 0.52]])],
    [
      'two nearly even choices',
      chain([
        [0.51, 0.49, 0, 0],
        [0, 0.49, 0.51, 0],
        [0, 0, 0.51, 0.49],
        [0.49, 0, 0.51, 0],
      ]),
    ],
    [
      '64 nearly even symbols',
      chain([Array.from({ length: 64 }, (_, i) => (i % 2 ? 1.05 : 0.95) / 64)]),
    ],
  ])('holds the entropy of %s in 85 % of runs or more', (_, source) => {
    const runs = 300;
    const rate = source.rate!.low;
    let held = 0;
    for (let run = 0; run < runs; run++) {
      const { low, high } = intervalOf(
        source.draw(10_000, `${run}`),
        source.alphabetSize,
        source.order!,
      );
      if (low <= rate && rate <= high) held++;
    }
    expect(held / runs).toBeGreaterThanOrEqual(0.85);
  });
});

describe('rareBits', () => {
  const withTallies = (pairs: number[], contexts: number[]): OrderCounts => ({
    order: 0,
    positions: pairs.reduce((a, b) => a + b, 0),
    contexts: contexts.length,
    pairs: pairs.length,
    pairTallies: talliesOf(pairs),
    contextTallies: talliesOf(contexts),
    blockBits: new Float64Array(0),
    blockPositions: new Float64Array(0),
  });

  /** What a pair expected λ times adds to the error of the sum with its Miller–Madow term, bits. */
  function errorBits(lambda: number): number {
    let probability = Math.exp(-lambda);
    let logs = 0;
    for (let x = 1; x < lambda + 12 * Math.sqrt(lambda) + 30; x++) {
      probability *= lambda / x;
      logs += probability * x * Math.log2(x);
    }
    return lambda * Math.log2(lambda) - logs + (1 - Math.exp(-lambda)) / 2 / Math.LN2;
  }

  it.each([0.25, 0.3, 0.4, 0.5, 0.7])(
    'is the error summed over a power law by which %d are seen twice for each seen once',
    (ratio) => {
      // λ has density λ^(−1 − α): Γ(1 − α) are seen once and Γ(2 − α)/2 twice, so that α = 1 − 2 · ratio.
      const alpha = 1 - 2 * ratio;
      const step = 0.02;
      let error = 0;
      let once = 0;
      for (let u = -45; u < 6; u += step) {
        const lambda = Math.exp(u);
        error += lambda ** -alpha * errorBits(lambda) * step;
        once += lambda ** -alpha * lambda * Math.exp(-lambda) * step;
      }
      const seenOnce = 4000;
      const counts = withTallies(
        [...new Array<number>(seenOnce).fill(1), ...new Array<number>(seenOnce * ratio).fill(2)],
        [seenOnce * (1 + 2 * ratio)],
      );
      const perOnce = (rareBits(counts) * counts.positions) / seenOnce;
      expect(Math.abs(perOnce / (-error / once) - 1)).toBeLessThan(0.05);
    },
  );

  it('is 0 without rare pairs, and where each rare pair has a context of its own', () => {
    expect(rareBits(withTallies([], []))).toBe(0);
    expect(rareBits(withTallies([5, 9, 3], [17]))).toBe(0);
    expect(rareBits(withTallies([1, 1, 2, 7], [1, 1, 2, 7]))).toBe(0);
  });
});
