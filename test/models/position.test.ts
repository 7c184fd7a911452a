import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { AdditiveModel } from '../../src/models/additive-model.ts';
import { BackOffModel } from '../../src/models/back-off-model.ts';
import { PairTrainer } from '../../src/models/pair-tree.ts';
import { readSentTable, roundCount, writeSentTable } from '../../src/models/sent-table.ts';
import { StaticModel } from '../../src/models/static-model.ts';
import { compileTable, type Unseen } from '../../src/models/static-table.ts';
import type { SymbolModel } from '../../src/models/symbol-model.ts';
import { RangeDecoder } from '../../src/stages/range-decoder.ts';
import { RangeEncoder } from '../../src/stages/range-encoder.ts';
import { type ModelCase, modelCases } from './model-cases.ts';
import { PlainBackOff } from './plain-back-off.ts';
import { RecordedIntervals } from './recorded-intervals.ts';

const POSITIONS = fc.constantFrom(2, 3, 24, 300);

/** Codes message by message, each in two pieces; `before` is called as each begins. */
function ratiosOf({ symbols, ends }: ModelCase, model: SymbolModel, before: () => void) {
  const sink = new RecordedIntervals();
  let from = 0;
  for (const end of ends) {
    before();
    const middle = Math.floor((from + end) / 2);
    model.encode(symbols, from, middle, sink);
    model.encode(symbols, middle, end, sink);
    from = end;
  }
  return sink;
}

/** The context of order k before each symbol, as a text: position, then symbols from the start of the message. */
function contextsOf(sample: ModelCase, length: number, positions: number): string[] {
  const { symbols, ends, alphabetSize } = sample;
  const contexts: string[] = [];
  let start = 0;
  for (let i = 0; i < symbols.length; i++) {
    if (ends.includes(i)) start = i;
    const before = Array.from({ length }, (_, j) => {
      const at = i - length + j;
      return at < start ? alphabetSize : symbols[at];
    });
    contexts.push(`${(i - start) % positions}: ${before.join()}`);
  }
  return contexts;
}

type Counts = Map<string, Map<number, number>>;

function countsOf(sample: ModelCase, lengths: readonly number[], positions: number): Counts {
  const counts: Counts = new Map();
  for (const length of lengths) {
    contextsOf(sample, length, positions).forEach((context, i) => {
      const of = counts.get(context) ?? new Map<number, number>();
      counts.set(context, of);
      of.set(sample.symbols[i], (of.get(sample.symbols[i]) ?? 0) + 1);
    });
  }
  return counts;
}

const sumOf = (counts: Map<number, number>) => [...counts.values()].reduce((a, b) => a + b, 0);

/** Decodes what was coded with a model of the same state, and compares. */
function expectDecoded(sample: ModelCase, encoder: SymbolModel, decoder: SymbolModel) {
  const { symbols, ends } = sample;
  const writer = new BitWriter();
  const stage = new RangeEncoder(writer, 48);
  stage.begin();
  let from = 0;
  for (const end of ends) {
    encoder.reset();
    encoder.encode(symbols, from, end, stage);
    from = end;
  }
  stage.end('any');
  const source = new RangeDecoder(new BitReader(writer.finish().bytes), 48);
  source.begin();
  const decoded = new Uint16Array(symbols.length);
  from = 0;
  for (const end of ends) {
    decoder.reset();
    decoder.decode(source, decoded, from, end);
    from = end;
  }
  expect(decoded).toEqual(symbols);
}

describe('BackOffModel with positions, against the plain model of its definition', () => {
  const halveAt = (m: number) => fc.constantFrom(3 * m, 3 * m + 7, 2 ** 22);
  const cases = modelCases.chain((c) => fc.tuple(fc.constant(c), halveAt(c.alphabetSize)));

  it('gives the same intervals, contexts starting anew at messages or running on', () => {
    fc.assert(
      fc.property(cases, POSITIONS, fc.boolean(), ([sample, limit], positions, startsAnew) => {
        const { alphabetSize, order, symbols, ends } = sample;
        const model = new BackOffModel(alphabetSize, order, limit, positions);
        const plain = new PlainBackOff(alphabetSize, order, limit, positions);
        const expected: string[] = [];
        for (let i = 0; i < symbols.length; i++) {
          if (startsAnew && ends.includes(i)) plain.start();
          expected.push(...plain.code(symbols[i]));
        }
        const got = ratiosOf(sample, model, () => startsAnew && model.startContexts());
        expect(got.ratios).toEqual(expected);
      }),
      { numRuns: 150, seed: 111 },
    );
  });

  it('returns to the trained state, and to position 0, at each reset', () => {
    fc.assert(
      fc.property(modelCases, modelCases, POSITIONS, (train, test, positions) => {
        const { alphabetSize, order } = train;
        const symbols = test.symbols.map((s) => s % alphabetSize);
        const sample = { alphabetSize, order, symbols, ends: test.ends };
        const trained = new BackOffModel(alphabetSize, order, 2 ** 22, positions);
        ratiosOf(train, trained, () => trained.startContexts());
        const model = trained.clone();
        model.markResetState();
        const got = ratiosOf(sample, model, () => model.reset()).ratios;
        const expected: string[] = [];
        let from = 0;
        for (const end of test.ends) {
          const fresh = new PlainBackOff(alphabetSize, order, 2 ** 22, positions);
          train.symbols.forEach((symbol, i) => {
            if (train.ends.includes(i)) fresh.start();
            fresh.code(symbol);
          });
          fresh.start();
          for (let i = from; i < end; i++) expected.push(...fresh.code(symbols[i]));
          from = end;
        }
        expect(got).toEqual(expected);
      }),
      { numRuns: 50, seed: 112 },
    );
  });

  it('decodes what it coded', () => {
    fc.assert(
      fc.property(cases, POSITIONS, ([sample, limit], positions) => {
        const { alphabetSize, order } = sample;
        const model = () => new BackOffModel(alphabetSize, order, limit, positions);
        expectDecoded(sample, model(), model());
      }),
      { numRuns: 100, seed: 113 },
    );
  });
});

describe('AdditiveModel with positions', () => {
  it('has the Dirichlet–multinomial form of each position and context as its code length', () => {
    const added = [
      { p: 1, q: 2 },
      { p: 1, q: 20 },
    ];
    fc.assert(
      fc.property(modelCases, fc.constantFrom(...added), POSITIONS, (sample, { p, q }, n) => {
        const { alphabetSize: m, order } = sample;
        const model = new AdditiveModel(m, order, { p, q }, 2 ** 22, n);
        const sink = ratiosOf(sample, model, () => model.startContexts());
        const alpha = p / q;
        let expected = 0;
        for (const counts of countsOf(sample, [order], n).values()) {
          for (const count of counts.values())
            for (let j = 0; j < count; j++) expected -= Math.log2(alpha + j);
          for (let j = 0; j < sumOf(counts); j++) expected += Math.log2(m * alpha + j);
        }
        expect(Math.abs(sink.bits - expected)).toBeLessThanOrEqual(1e-9 * expected + 1e-9);
        const fresh = () => new AdditiveModel(m, order, { p, q }, 2 ** 22, n);
        expectDecoded(sample, fresh(), fresh());
      }),
      { numRuns: 150, seed: 121 },
    );
  });
});

describe('StaticModel with positions', () => {
  const rules: Unseen[] = ['escape', { add: { p: 1, q: 20 } }];

  function train({ alphabetSize, order, symbols, ends }: ModelCase, positions: number) {
    const trainer = new PairTrainer(alphabetSize, order, true, positions);
    trainer.push({ alphabetSize, symbols, messageEnds: Uint32Array.from(ends) });
    return trainer.pairs.tree;
  }

  it('gives the intervals of its definition, escaping at the same position', () => {
    fc.assert(
      fc.property(
        modelCases,
        modelCases,
        fc.constantFrom(...rules),
        POSITIONS,
        (trained, other, unseen, positions) => {
          const { alphabetSize: m, order } = trained;
          const symbols = other.symbols.map((s) => s % m);
          const coded = { ...other, alphabetSize: m, order, symbols };
          const lengths = Array.from({ length: order + 1 }, (_, length) => length);
          const counts = countsOf(trained, lengths, positions);
          const contexts = lengths.map((length) => contextsOf(coded, length, positions));
          const expected: string[] = [];
          symbols.forEach((symbol, i) => {
            if (unseen !== 'escape' && unseen !== 'none') {
              const { p, q } = unseen.add;
              const of = counts.get(contexts[order][i]);
              if (of === undefined) expected.push(`1/${m}`);
              else expected.push(`${q * (of.get(symbol) ?? 0) + p}/${q * sumOf(of) + p * m}`);
              return;
            }
            for (let length = order; ; length--) {
              if (length < 0) {
                expected.push(`1/${m}`);
                return;
              }
              const of = counts.get(contexts[length][i]);
              if (of === undefined) continue;
              const count = of.get(symbol);
              expected.push(`${count ?? of.size}/${sumOf(of) + (of.size === m ? 0 : of.size)}`);
              if (count !== undefined) return;
            }
          });
          const table = compileTable(train(trained, positions), order, unseen, 'exact');
          const model = new StaticModel(table);
          const isCoded = (ratio: string) => ratio.split('/')[0] !== ratio.split('/')[1];
          expect(ratiosOf(coded, model, () => model.reset()).ratios).toEqual(
            expected.filter(isCoded),
          );
          const quantised = compileTable(train(trained, positions), order, unseen, { bits: 20 });
          expectDecoded(coded, new StaticModel(quantised), new StaticModel(quantised));
        },
      ),
      { numRuns: 200, seed: 141 },
    );
  });

  it('comes back from a sent table, and codes what the table was fitted to', () => {
    fc.assert(
      fc.property(modelCases, POSITIONS, (sample, positions) => {
        const { alphabetSize, order, symbols } = sample;
        const tree = train(sample, positions);
        const writer = new BitWriter();
        const stage = new RangeEncoder(writer, 48);
        stage.begin();
        writeSentTable(tree, order, stage);
        stage.end('any');
        const source = new RangeDecoder(new BitReader(writer.finish().bytes), 48);
        source.begin();
        const back = readSentTable(alphabetSize, order, symbols.length, source, positions);
        const bits = { bits: 20 };
        const here = new StaticModel(compileTable(tree, order, 'none', bits, roundCount));
        const there = new StaticModel(compileTable(back, order, 'none', bits));
        const expected = ratiosOf(sample, here, () => here.reset()).ratios;
        expect(ratiosOf(sample, there, () => there.reset()).ratios).toEqual(expected);
        expectDecoded(sample, here, there);
      }),
      { numRuns: 150, seed: 171 },
    );
  });
});
