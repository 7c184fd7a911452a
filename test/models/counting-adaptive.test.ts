import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { AdditiveModel } from '../../src/models/additive-model.ts';
import { BackOffModel } from '../../src/models/back-off-model.ts';
import { CountingAdditive } from '../../src/models/counting-additive.ts';
import { CountingBackOff } from '../../src/models/counting-back-off.ts';
import { OperationTally } from '../../src/models/counting-tally.ts';
import { type ModelCase, modelCases } from './model-cases.ts';
import { RecordedIntervals } from './recorded-intervals.ts';

/** Large enough for every case. */
const SLOTS = 2 ** 12;

type Model = BackOffModel | AdditiveModel;
type Counting = CountingBackOff | CountingAdditive;

/** Intervals of both, message by message; `restart` follows each message. */
function bothIntervals(
  { symbols, ends }: ModelCase,
  model: Model,
  counting: Counting,
  isReset: boolean,
): { model: unknown[]; counting: unknown[] } {
  const byModel = new RecordedIntervals();
  const byCounting = new RecordedIntervals();
  if (isReset) {
    model.markResetState();
    counting.markResetState();
  }
  let from = 0;
  for (const end of ends) {
    model.encode(symbols, from, end, byModel);
    counting.code(symbols, from, end, byCounting);
    if (isReset) {
      model.reset();
      counting.reset();
    }
    from = end;
  }
  return { model: byModel.intervals, counting: byCounting.intervals };
}

const settings = fc.record({
  positions: fc.constantFrom(1, 1, 3),
  isReset: fc.boolean(),
  isTrained: fc.boolean(),
});

describe('counting passes give the intervals of their models', () => {
  it('back-off', () => {
    fc.assert(
      fc.property(
        modelCases,
        settings,
        fc.constantFrom(0, 7, 2 ** 20),
        (sample, { positions, isReset, isTrained }, more) => {
          const { alphabetSize, order } = sample;
          const halveAt = 3 * alphabetSize + more;
          const model = new BackOffModel(alphabetSize, order, halveAt, positions);
          if (isTrained) model.encode(sample.symbols, 0, sample.symbols.length, { put() {} });
          model.startContexts();
          const tallies = [new OperationTally(), new OperationTally()] as const;
          const counting = new CountingBackOff(
            model,
            alphabetSize,
            order,
            halveAt,
            SLOTS,
            ...tallies,
          );
          const intervals = bothIntervals(sample, model, counting, isReset);
          expect(intervals.counting).toEqual(intervals.model);
          for (const tally of tallies)
            expect(tally.counts().symbolCount).toBe(sample.ends.at(-1) ?? 0);
        },
      ),
      { numRuns: 300, seed: 21 },
    );
  });

  it('additive', () => {
    fc.assert(
      fc.property(
        modelCases,
        settings,
        fc.constantFrom({ p: 1, q: 2 }, { p: 1, q: 1 }, { p: 3, q: 7 }),
        fc.constantFrom(0, 9, 2 ** 20),
        (sample, { positions, isReset, isTrained }, added, more) => {
          const { alphabetSize, order } = sample;
          const halveAt = added.p * alphabetSize + 2 * added.q + more;
          const model = new AdditiveModel(alphabetSize, order, added, halveAt, positions);
          if (isTrained) model.encode(sample.symbols, 0, sample.symbols.length, { put() {} });
          model.startContexts();
          const counting = new CountingAdditive(
            model,
            alphabetSize,
            order,
            added,
            halveAt,
            SLOTS,
            new OperationTally(),
            new OperationTally(),
          );
          const intervals = bothIntervals(sample, model, counting, isReset);
          expect(intervals.counting).toEqual(intervals.model);
        },
      ),
      { numRuns: 300, seed: 22 },
    );
  });
});
