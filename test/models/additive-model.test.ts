import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { AdditiveModel } from '../../src/models/additive-model.ts';
import { Meter } from '../../src/stages/meter.ts';
import { type ModelCase, modelCases } from './model-cases.ts';
import { RecordedIntervals } from './recorded-intervals.ts';

const ADDED = [
  { p: 1, q: 2 },
  { p: 1, q: 1 },
  { p: 1, q: 20 },
  { p: 3, q: 2 },
];

/** Counts of each context over the parts between `ends`, contexts starting anew at each. */
function contextCounts({ symbols, ends, order, alphabetSize }: ModelCase) {
  const contexts = new Map<string, Map<number, number>>();
  let history: number[] = new Array(order).fill(alphabetSize);
  for (let i = 0; i < symbols.length; i++) {
    if (ends.includes(i)) history = new Array(order).fill(alphabetSize);
    const key = history.join();
    const counts = contexts.get(key) ?? new Map<number, number>();
    contexts.set(key, counts);
    counts.set(symbols[i], (counts.get(symbols[i]) ?? 0) + 1);
    history = order === 0 ? [] : [...history.slice(1), symbols[i]];
  }
  return contexts;
}

/** Dirichlet–multinomial code length: log2 of Γ(n + mα) Γ(α)^m ÷ (Γ(mα) Π Γ(c + α)), as rising factorials. */
function dirichletBits(contexts: Map<string, Map<number, number>>, m: number, alpha: number) {
  let bits = 0;
  for (const counts of contexts.values()) {
    let n = 0;
    for (const count of counts.values()) {
      for (let j = 0; j < count; j++) bits -= Math.log2(alpha + j);
      n += count;
    }
    for (let j = 0; j < n; j++) bits += Math.log2(m * alpha + j);
  }
  return bits;
}

describe('AdditiveModel without halving', () => {
  it('has the closed form of each context as its code length', () => {
    fc.assert(
      fc.property(modelCases, fc.constantFrom(...ADDED), (sample, added) => {
        const model = new AdditiveModel(sample.alphabetSize, sample.order, added, 2 ** 22);
        const sink = new RecordedIntervals();
        const meter = new Meter();
        let from = 0;
        for (const end of sample.ends) {
          model.startContexts();
          model.encode(sample.symbols, from, end, {
            put(low, frequency, total) {
              sink.put(low, frequency, total);
              meter.put(low, frequency, total);
            },
          });
          from = end;
        }
        const expected = dirichletBits(
          contextCounts(sample),
          sample.alphabetSize,
          added.p / added.q,
        );
        expect(Math.abs(sink.bits - expected)).toBeLessThanOrEqual(1e-9 * expected + 1e-9);
        expect(Math.abs(meter.takeBits() - expected)).toBeLessThanOrEqual(1e-9 * expected + 1e-9);
      }),
      { numRuns: 200, seed: 21 },
    );
  });

  it('has it for each message where all is forgotten between messages', () => {
    fc.assert(
      fc.property(modelCases, fc.constantFrom(...ADDED), (sample, added) => {
        const { alphabetSize, order } = sample;
        const model = new AdditiveModel(alphabetSize, order, added, 2 ** 22);
        model.markResetState();
        let from = 0;
        for (const end of sample.ends) {
          model.reset();
          const sink = new RecordedIntervals();
          model.encode(sample.symbols, from, end, sink);
          const symbols = sample.symbols.slice(from, end);
          const message = { alphabetSize, order, symbols, ends: [] };
          const expected = dirichletBits(contextCounts(message), alphabetSize, added.p / added.q);
          expect(Math.abs(sink.bits - expected)).toBeLessThanOrEqual(1e-9 * expected + 1e-9);
          from = end;
        }
      }),
      { numRuns: 100, seed: 22 },
    );
  });
});

describe('AdditiveModel with halving', () => {
  it('follows the plain rule: a context is halved, rounded down, while its total passes halveAt', () => {
    fc.assert(
      fc.property(modelCases, fc.constantFrom(...ADDED), fc.nat(40), (sample, added, room) => {
        const { alphabetSize, order, symbols, ends } = sample;
        const { p, q } = added;
        const halveAt = p * alphabetSize + 2 * q + room;
        fc.pre(halveAt <= 2 ** 22);
        const model = new AdditiveModel(alphabetSize, order, added, halveAt);
        const sink = new RecordedIntervals();
        const expected: string[] = [];
        const contexts = new Map<string, Map<number, number>>();
        let from = 0;
        for (const end of ends) {
          model.startContexts();
          model.encode(symbols, from, end, sink);
          let history: number[] = new Array(order).fill(alphabetSize);
          for (let i = from; i < end; i++) {
            const key = history.join();
            const counts = contexts.get(key) ?? new Map<number, number>();
            contexts.set(key, counts);
            const sumOf = () => [...counts.values()].reduce((a, b) => a + b, 0);
            const weight = q * (counts.get(symbols[i]) ?? 0) + p;
            if (alphabetSize > 1) expected.push(`${weight}/${q * sumOf() + p * alphabetSize}`);
            counts.set(symbols[i], (counts.get(symbols[i]) ?? 0) + 1);
            while (q * sumOf() + p * alphabetSize > halveAt) {
              for (const [s, count] of counts) counts.set(s, Math.floor(count / 2));
            }
            history = order === 0 ? [] : [...history.slice(1), symbols[i]];
          }
          from = end;
        }
        expect(sink.ratios).toEqual(expected);
        for (const { total } of sink.intervals) expect(total).toBeLessThanOrEqual(halveAt);
      }),
      { numRuns: 150, seed: 23 },
    );
  });
});
