import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { empiricalLengthBits } from '../../src/models/empirical-length.ts';
import { LARGEST_TOTAL } from '../../src/models/interval.ts';
import { PairTrainer } from '../../src/models/pair-tree.ts';
import { StaticModel } from '../../src/models/static-model.ts';
import { compileTable, type Unseen } from '../../src/models/static-table.ts';
import { Meter } from '../../src/stages/meter.ts';
import { type ModelCase, modelCases } from './model-cases.ts';
import { RecordedIntervals } from './recorded-intervals.ts';

type Counts = Map<string, Map<number, number>>;

/** Counts of every context of order 0 … k, keyed by its symbols, as maps. */
function plainCounts({ symbols, ends, order, alphabetSize }: ModelCase, startAtMessages: boolean) {
  const counts: Counts = new Map();
  let history: number[] = new Array(order).fill(alphabetSize);
  for (let i = 0; i < symbols.length; i++) {
    if (startAtMessages && ends.includes(i)) history = new Array(order).fill(alphabetSize);
    for (let length = 0; length <= order; length++) {
      const key = history.slice(order - length).join();
      const of = counts.get(key) ?? new Map<number, number>();
      counts.set(key, of);
      of.set(symbols[i], (of.get(symbols[i]) ?? 0) + 1);
    }
    history = order === 0 ? [] : [...history.slice(1), symbols[i]];
  }
  return counts;
}

const sumOf = (counts: Map<number, number>) => [...counts.values()].reduce((a, b) => a + b, 0);

/** Ratios of a symbol by the rule of `unseen`, straight from the maps. */
function plainRatios(counts: Counts, sample: ModelCase, unseen: Unseen): string[] {
  const { alphabetSize: m, order, symbols, ends } = sample;
  const ratios: string[] = [];
  let history: number[] = new Array(order).fill(m);
  for (let i = 0; i < symbols.length; i++) {
    if (ends.includes(i)) history = new Array(order).fill(m);
    const symbol = symbols[i];
    if (unseen === 'escape') {
      let length = order;
      for (; length >= 0; length--) {
        const of = counts.get(history.slice(order - length).join());
        if (of === undefined) continue;
        const total = sumOf(of) + (of.size === m ? 0 : of.size);
        const count = of.get(symbol);
        ratios.push(`${count ?? of.size}/${total}`);
        if (count !== undefined) break;
      }
      if (length < 0) ratios.push(`1/${m}`);
    } else if (unseen !== 'none') {
      const of = counts.get(history.join());
      const { p, q } = unseen.add;
      if (of === undefined) ratios.push(`1/${m}`);
      else ratios.push(`${q * (of.get(symbol) ?? 0) + p}/${q * sumOf(of) + p * m}`);
    }
    history = order === 0 ? [] : [...history.slice(1), symbol];
  }
  return ratios.filter((ratio) => ratio.split('/')[0] !== ratio.split('/')[1]);
}

function train(sample: ModelCase, startAtMessages = true) {
  const { alphabetSize, order, symbols, ends } = sample;
  const trainer = new PairTrainer(alphabetSize, order, startAtMessages);
  trainer.push({ alphabetSize, symbols, messageEnds: Uint32Array.from(ends) });
  return trainer.pairs;
}

function codedRatios(model: StaticModel, sample: ModelCase): RecordedIntervals {
  const sink = new RecordedIntervals();
  let from = 0;
  for (const end of sample.ends) {
    model.reset();
    model.encode(sample.symbols, from, end, sink);
    from = end;
  }
  return sink;
}

/** Two cases of one alphabet and order: to train on, and to code. */
const pairsOfCases = fc.tuple(modelCases, modelCases).map(([trained, coded]) => ({
  trained,
  coded: {
    ...coded,
    alphabetSize: trained.alphabetSize,
    order: trained.order,
    symbols: coded.symbols.map((symbol) => symbol % trained.alphabetSize),
  },
}));

const rules: Unseen[] = ['escape', { add: { p: 1, q: 1 } }, { add: { p: 1, q: 20 } }];

describe('StaticModel with exact weights', () => {
  it('gives the intervals of its definition', () => {
    fc.assert(
      fc.property(pairsOfCases, fc.constantFrom(...rules), ({ trained, coded }, unseen) => {
        const table = compileTable(train(trained).tree, trained.order, unseen, 'exact');
        const expected = plainRatios(plainCounts(trained, true), coded, unseen);
        expect(codedRatios(new StaticModel(table), coded).ratios).toEqual(expected);
      }),
      { numRuns: 300, seed: 41 },
    );
  });

  it('has the empirical length when fitted to what it codes', () => {
    fc.assert(
      fc.property(modelCases, fc.boolean(), (sample, startAtMessages) => {
        const { alphabetSize, order, symbols, ends } = sample;
        const messageEnds = Uint32Array.from(ends);
        const sequence = { alphabetSize, symbols, messageEnds };
        let expected = 0;
        for (const [key, counts] of plainCounts(sample, startAtMessages)) {
          const length = key === '' ? 0 : key.split(',').length;
          if (length !== order) continue;
          const total = sumOf(counts);
          for (const count of counts.values()) expected += count * Math.log2(total / count);
        }
        const fit = empiricalLengthBits(sequence, order, startAtMessages);
        expect(Math.abs(fit - expected)).toBeLessThanOrEqual(1e-9 * expected + 1e-9);
        const table = compileTable(train(sample, startAtMessages).tree, order, 'none', 'exact');
        const model = new StaticModel(table);
        const meter = new Meter();
        let from = 0;
        for (const end of ends) {
          if (startAtMessages) model.reset();
          model.encode(symbols, from, end, meter);
          from = end;
        }
        expect(Math.abs(meter.takeBits() - expected)).toBeLessThanOrEqual(1e-9 * expected + 1e-9);
      }),
      { numRuns: 200, seed: 42 },
    );
  });
});

describe('StaticModel with quantised frequencies', () => {
  it('keeps every total at a power of two and every possible symbol in it', () => {
    fc.assert(
      fc.property(
        pairsOfCases,
        fc.constantFrom(...rules),
        fc.nat(4),
        ({ trained, coded }, unseen, more) => {
          const least = 2 + Math.ceil(Math.log2(trained.alphabetSize));
          const bits = Math.min(22, least + more);
          const table = compileTable(train(trained).tree, trained.order, unseen, { bits });
          const { intervals } = codedRatios(new StaticModel(table), coded);
          for (const { total } of intervals) {
            expect([2 ** bits, trained.alphabetSize]).toContain(total);
            expect(total).toBeLessThanOrEqual(LARGEST_TOTAL);
          }
          for (let context = 0; context < table.totals.length; context++) {
            if (table.totals[context] === 0) continue;
            const from = table.entryStart[context];
            const to = table.entryStart[context + 1];
            const seen = table.frequencies.slice(from, to);
            expect(Math.min(...seen)).toBeGreaterThanOrEqual(1);
            const rest = trained.alphabetSize - (to - from);
            let unseenWeight = table.totals[context];
            for (const frequency of seen) unseenWeight -= frequency;
            if (rest === 0) expect(unseenWeight).toBe(0);
            else if (unseen === 'escape') expect(unseenWeight).toBeGreaterThanOrEqual(1);
            else expect(unseenWeight).toBe(rest * table.unseenFrequency[context]);
          }
        },
      ),
      { numRuns: 200, seed: 43 },
    );
  });
});
