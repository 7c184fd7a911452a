import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BackOffModel } from '../../src/models/back-off-model.ts';
import { type ModelCase, modelCases } from './model-cases.ts';
import { PlainBackOff } from './plain-back-off.ts';
import { RecordedIntervals } from './recorded-intervals.ts';

/** Ratios by the plain model; `restart` is called between messages. */
function plainRatios(
  { symbols, ends }: ModelCase,
  plain: PlainBackOff,
  restart: (plain: PlainBackOff) => void,
): string[] {
  const ratios: string[] = [];
  let from = 0;
  for (const end of ends) {
    for (let i = from; i < end; i++) ratios.push(...plain.code(symbols[i]));
    restart(plain);
    from = end;
  }
  return ratios;
}

function fastRatios({ symbols, ends }: ModelCase, model: BackOffModel, restart: () => void) {
  const sink = new RecordedIntervals();
  let from = 0;
  for (const end of ends) {
    // Two pieces a message: a piece's edge must not matter.
    const middle = Math.floor((from + end) / 2);
    model.encode(symbols, from, middle, sink);
    model.encode(symbols, middle, end, sink);
    restart();
    from = end;
  }
  return sink.ratios;
}

describe('BackOffModel against the plain model of its definition', () => {
  const halveAt = (m: number) => fc.constantFrom(3 * m, 3 * m + 7, 2 ** 22);

  it('gives the same intervals where contexts start anew at messages', () => {
    fc.assert(
      fc.property(
        modelCases.chain((c) => fc.tuple(fc.constant(c), halveAt(c.alphabetSize))),
        ([sample, limit]) => {
          const model = new BackOffModel(sample.alphabetSize, sample.order, limit);
          const plain = new PlainBackOff(sample.alphabetSize, sample.order, limit);
          expect(fastRatios(sample, model, () => model.startContexts())).toEqual(
            plainRatios(sample, plain, (p) => p.start()),
          );
        },
      ),
      { numRuns: 150, seed: 11 },
    );
  });

  it('gives the same intervals where everything is forgotten at messages', () => {
    fc.assert(
      fc.property(modelCases, (sample) => {
        const { alphabetSize, order } = sample;
        const model = new BackOffModel(alphabetSize, order, 2 ** 22);
        model.markResetState();
        const plain = new PlainBackOff(alphabetSize, order, 2 ** 22);
        const forget = (p: PlainBackOff) => {
          p.contexts.clear();
          p.start();
        };
        expect(fastRatios(sample, model, () => model.reset())).toEqual(
          plainRatios(sample, plain, forget),
        );
      }),
      { numRuns: 150, seed: 12 },
    );
  });

  it('returns to the trained state at each reset', () => {
    fc.assert(
      fc.property(modelCases, modelCases, fc.constantFrom(1, 3), (train, test, factor) => {
        const { alphabetSize, order } = train;
        const symbols = test.symbols.map((s) => s % alphabetSize);
        const sample = { alphabetSize, order, symbols, ends: test.ends };
        const limit = factor === 1 ? 3 * alphabetSize : 2 ** 22;
        const trained = new BackOffModel(alphabetSize, order, limit);
        fastRatios(train, trained, () => trained.startContexts());
        const model = trained.clone();
        model.markResetState();
        const got = fastRatios(sample, model, () => model.reset());
        const expected: string[] = [];
        let from = 0;
        for (const end of test.ends) {
          const fresh = new PlainBackOff(alphabetSize, order, limit);
          plainRatios(train, fresh, (p) => p.start());
          for (let i = from; i < end; i++) expected.push(...fresh.code(symbols[i]));
          from = end;
        }
        expect(got).toEqual(expected);
      }),
      { numRuns: 60, seed: 13 },
    );
  });
});

describe('BackOffModel at scale', () => {
  it('keeps its totals within halveAt over ten times as many symbols', () => {
    const symbols = new Uint8Array(40_000).map((_, i) => (i % 7 === 0 ? i % 5 : (i * i) % 3));
    const sink = new RecordedIntervals();
    new BackOffModel(8, 2, 400).encode(symbols, 0, symbols.length, sink);
    expect(Math.max(...sink.intervals.map((interval) => interval.total))).toBe(400);
    const plain = new PlainBackOff(8, 2, 400);
    expect(sink.ratios).toEqual([...symbols].flatMap((symbol) => plain.code(symbol)));
  });

  it('halves a context whose count fills a 16-bit entry', () => {
    const symbols = new Uint16Array(70_000).fill(300);
    const sink = new RecordedIntervals();
    new BackOffModel(512, 1, 2 ** 22).encode(symbols, 0, symbols.length, sink);
    const largest = Math.max(...sink.intervals.map((interval) => interval.frequency));
    expect(largest).toBe(2 ** 16 - 2);
  });
});
