import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { AliasRows } from '../../src/harness/calibrate-draw.ts';
import { hiddenMarkovSource } from '../../src/harness/calibrate-hidden.ts';
import { markovSource } from '../../src/harness/calibrate-markov.ts';
import type { CalibrationSource } from '../../src/harness/calibrate-source.ts';
import { calibrationSource, calibrationSourceNames } from '../../src/harness/calibrate-sources.ts';
import { periodicSource } from '../../src/harness/calibrate-special.ts';
import { rateAndVariance } from '../outside/markov-chain.ts';
import vectors from '../outside/vectors/entropy-rates.json' with { type: 'json' };

const sourceNamed = (name: string) => calibrationSource(name)!;
const sources = calibrationSourceNames.map(sourceNamed);

const fromRows = (order: number, rows: readonly (readonly number[])[]): CalibrationSource =>
  markovSource({
    name: '',
    description: '',
    alphabetSize: rows[0].length,
    order,
    law: Float64Array.from(rows.flat()),
  });

/** All sequences of `length` symbols. */
function* allSequences(m: number, length: number): Generator<Uint8Array> {
  for (let code = 0; code < m ** length; code++) {
    const symbols = new Uint8Array(length);
    for (let i = 0, rest = code; i < length; i++, rest = Math.floor(rest / m))
      symbols[i] = rest % m;
    yield symbols;
  }
}

describe('rates', () => {
  // Computed outside by a linear solve and a power iteration (Cover & Thomas, "Elements of Information Theory", §4.2).
  it('are those found outside, and so are entropies of lower orders', () => {
    let checked = 0;
    for (const vector of vectors.cases) {
      if (vector.kind === 'bernoulli') {
        expect(fromRows(0, [[1 - vector.p!, vector.p!]]).rate!.low).toBeCloseTo(
          vector.entropy_bits!,
          12,
        );
      } else if (vector.kind === 'markov2' || vector.kind === 'markov_n') {
        const rows = vector.T ?? [
          [1 - vector.p01!, vector.p01!],
          [vector.p10!, 1 - vector.p10!],
        ];
        const source = fromRows(1, rows);
        expect(source.rate!.low).toBeCloseTo(vector.entropy_rate_bits!, 12);
        expect(source.conditionalBits(0)).toBeCloseTo(vector.order0_entropy_bits!, 12);
      } else {
        const ones = vector.P1_given_ab!;
        const source = fromRows(
          2,
          (['00', '01', '10', '11'] as const).map((ab) => [1 - ones[ab], ones[ab]]),
        );
        expect(source.rate!.low).toBeCloseTo(vector.entropy_rate_bits!, 12);
        expect(source.conditionalBits(1)).toBeCloseTo(vector.cond_entropy_order1_bits!, 12);
        expect(source.conditionalBits(0)).toBeCloseTo(vector.order0_entropy_bits!, 12);
      }
      checked++;
    }
    expect(checked).toBe(vectors.cases.length);
  });

  it('of the sources with a closed form are that', () => {
    for (const m of [2, 256, 65_536]) {
      expect(sourceNamed(`even-${m}`).rate).toEqual({ low: Math.log2(m), high: Math.log2(m) });
    }
    // Σ i 2^−i for i = 1 … 11, and the last once more: 2 − 2^−10.
    expect(sourceNamed('halving-12').rate!.low).toBeCloseTo(2 - 2 ** -10, 12);
    // A geometric law cut after m symbols: log2 of its sum, less the mean index times log2 of its ratio.
    const [r, m] = [0.95, 256];
    const sum = (1 - r ** m) / (1 - r);
    const mean = r / (1 - r) - (m * r ** m) / (1 - r ** m);
    expect(sourceNamed('geometric-256').rate!.low).toBeCloseTo(
      Math.log2(sum) - mean * Math.log2(r),
      10,
    );
    expect(sourceNamed('split-1').rate!.low).toBeCloseTo(1, 12);
    expect(sourceNamed('constant').rate!.high).toBe(0);
    expect(sourceNamed('period-12').rate!.high).toBe(0);
  });

  it('agree with a power iteration for any chain', () => {
    const rows = fc
      .tuple(fc.integer({ min: 2, max: 3 }), fc.integer({ min: 1, max: 2 }))
      .chain(([m, order]) =>
        fc.tuple(
          fc.constant(order),
          fc.array(fc.array(fc.integer({ min: 1, max: 20 }), { minLength: m, maxLength: m }), {
            minLength: m ** order,
            maxLength: m ** order,
          }),
        ),
      );
    fc.assert(
      fc.property(rows, ([order, weights]) => {
        const law = weights.map((row) => {
          const total = row.reduce((a, b) => a + b, 0);
          return row.map((w) => w / total);
        });
        const theory = rateAndVariance({ alphabetSize: law[0].length, order, law });
        expect(fromRows(order, law).rate!.low).toBeCloseTo(theory.rate, 9);
      }),
      { numRuns: 5 },
    );
  });

  it('never rise with the order', () => {
    for (const source of sources) {
      for (let k = 1; k < 8; k++) {
        const before = source.conditionalBits(k - 1);
        const bits = source.conditionalBits(k);
        if (before === undefined || bits === undefined) continue;
        expect(bits).toBeLessThanOrEqual(before + 1e-9);
        if (source.order !== undefined && k > source.order) expect(bits).toBe(before);
      }
    }
  });

  it('of a hidden chain lie between bounds that close in as they look further', () => {
    const bounds = [2, 5, 10].map(
      (span) =>
        hiddenMarkovSource({
          name: '',
          description: '',
          transitions: [
            [0.95, 0.05],
            [0.1, 0.9],
          ],
          ones: [0.1, 0.9],
          span,
        }).rate!,
    );
    for (let i = 0; i < bounds.length; i++) {
      expect(bounds[i].low).toBeLessThan(bounds[i].high);
      if (i === 0) continue;
      expect(bounds[i].low).toBeGreaterThanOrEqual(bounds[i - 1].low);
      expect(bounds[i].high).toBeLessThanOrEqual(bounds[i - 1].high);
    }
    const { rate } = sourceNamed('hidden-2');
    expect(rate!.high - rate!.low).toBeLessThan(1e-8);
    expect(rate!.low).toBeGreaterThanOrEqual(bounds[2].low);
    expect(rate!.high).toBeLessThanOrEqual(bounds[2].high);
  });
});

describe('information', () => {
  const small: [string, CalibrationSource, number][] = [
    ['a chain', sourceNamed('chain-1'), 7],
    ['a chain of order 2', sourceNamed('chain-2'), 7],
    ['a chain with impossible successors', sourceNamed('split-1'), 5],
    ['a hidden chain', sourceNamed('hidden-2'), 7],
    ['a word', periodicSource('', '', 2, [0, 0, 1, 0, 1, 1]), 8],
  ];

  it.each(small)(
    'of all stretches of %s is that of a probability law with its entropies',
    (_, source, longest) => {
      let shorter = 0;
      for (let length = 1; length <= longest; length++) {
        let sum = 0;
        let bits = 0;
        for (const symbols of allSequences(source.alphabetSize, length)) {
          const information = source.informationBits(symbols)!;
          const probability = 2 ** -information;
          sum += probability;
          if (probability > 0) bits += probability * information;
        }
        expect(sum).toBeCloseTo(1, 9);
        // H(Xⁿ) − H(Xⁿ⁻¹): the chain rule, Cover & Thomas 2006, theorem 2.5.1.
        expect(bits - shorter).toBeCloseTo(source.conditionalBits(length - 1)!, 9);
        shorter = bits;
      }
    },
  );

  it.each(
    sources
      .filter((s) => s.rate !== undefined)
      .map((s): [string, CalibrationSource] => [s.name, s]),
  )('of a stretch of %s is about its rate', (_, source) => {
    const length = 50_000;
    const rate = source.informationBits(source.draw(length, 'information'))! / length;
    // The variance of a symbol's information is below 4 bits² for all of these, with all that neighbours share.
    expect(Math.abs(rate - source.rate!.low)).toBeLessThan(5 * Math.sqrt(4 / length));
    expect(Number.isFinite(rate)).toBe(true);
  });
});

describe('draws', () => {
  it.each(sources.map((s): [string, CalibrationSource] => [s.name, s]))(
    'of %s repeat themselves for a seed and stay in the alphabet',
    (_, source) => {
      const once = source.draw(3000, 'a');
      expect(source.draw(3000, 'a')).toEqual(once);
      expect(once.every((symbol) => symbol < source.alphabetSize)).toBe(true);
      if (source.name !== 'constant' && source.name !== 'period-12') {
        expect(source.draw(3000, 'b')).not.toEqual(once);
      }
      expect(source.draw(0, 'a').length).toBe(0);
      expect(source.draw(1, 'a').length).toBe(1);
    },
  );

  it('by alias follow their law exactly over a grid of uniform numbers', () => {
    const weights = fc.array(fc.integer({ min: 0, max: 6 }), { minLength: 1, maxLength: 9 });
    fc.assert(
      fc.property(weights, weights, (first, second) => {
        const m = Math.max(first.length, second.length);
        const rows = [first, second].map((list) => {
          const row = Array.from({ length: m }, (_, s) => list[s] ?? 0);
          if (!row.some((w) => w > 0)) row[m - 1] = 1;
          const total = row.reduce((a, b) => a + b, 0);
          return row.map((w) => w / total);
        });
        const alias = new AliasRows(Float64Array.from(rows.flat()), m);
        const points = 20_000;
        rows.forEach((row, r) => {
          const drawn = new Array<number>(m).fill(0);
          for (let i = 0; i < points; i++) drawn[alias.draw(r, (i + 0.5) / points)]++;
          row.forEach((p, s) => {
            // Each of at most 2m cells may gain or lose a point.
            expect(Math.abs(drawn[s] - p * points)).toBeLessThanOrEqual(2 * m);
            if (p === 0) expect(drawn[s]).toBe(0);
          });
        });
      }),
      { numRuns: 30 },
    );
  });

  it('of the sources that change do change', () => {
    const share = (symbols: ArrayLike<number>, from: number, to: number) => {
      let ones = 0;
      for (let i = from; i < to; i++) ones += symbols[i];
      return ones / (to - from);
    };
    // Five standard deviations of a share over 20 000 bits are below 0.018.
    const switching = sourceNamed('switching').draw(40_000, 'x');
    expect(Math.abs(share(switching, 0, 20_000) - 0.1)).toBeLessThan(0.018);
    expect(Math.abs(share(switching, 20_000, 40_000) - 0.25)).toBeLessThan(0.018);
    const drifting = sourceNamed('drifting').draw(40_000, 'x');
    expect(Math.abs(share(drifting, 0, 20_000) - 0.1375)).toBeLessThan(0.018);
    expect(Math.abs(share(drifting, 20_000, 40_000) - 0.3125)).toBeLessThan(0.018);
  });
});
