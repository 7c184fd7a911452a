import { describe, expect, it } from 'vitest';
import { pooledLoadedRun } from '../../src/compare/pooled-messages.ts';
import { plainRun, pooledRun, variationOfCell } from '../../src/compare/pooled-record.ts';
import { runRecordSchema } from '../../src/harness/run-record.ts';
import { type Made, madeCell, madeEntropy, madeRecord } from './curve-records.ts';

const cell = (fold: number, rate: number, more: Partial<Made> = {}) =>
  madeCell({ candidate: 'huffman', rate, ...more, vary: { ...more.vary, fold } });

describe('folds pooled', () => {
  // Two folds of 1000 and 3000 symbols.
  const short = cell(1, 4, { more: { units_per_message: { mean: 5, min: 3 }, unit_count: 50 } });
  const long = cell(2, 5, {
    more: {
      symbol_count: 3000,
      carried_bits: 15_000,
      message_count: 20,
      units_per_message: { mean: 2.5, min: 4 },
      unit_count: 50,
    },
  });
  const entropy = [madeEntropy([4, 3], 'a+fold=1'), madeEntropy([6, 4, 3], 'a+fold=2')];
  const { record, foldRates } = pooledRun(madeRecord([short, long], entropy));

  it('are one cell, whose rate is the mean over all symbols', () => {
    expect(record.cells).toHaveLength(1);
    const [pooled] = record.cells;
    expect(pooled).toMatchObject({
      id: 'a/huffman@shipped/message',
      symbol_count: 4000,
      message_count: 30,
      carried_bits: 19_000,
      // (4 · 1000 + 5 · 3000) ÷ 4000
      rate: 4.75,
      units_per_message: { mean: 100 / 30, min: 3 },
      account: { floor: 4000, structure: 2000 + 3000 },
    });
    expect(pooled.vary).toBeUndefined();
    expect([...foldRates]).toEqual([['a/huffman@shipped/message', [4, 5]]]);
    expect(runRecordSchema.safeParse(record).error?.issues).toBeUndefined();
  });

  it('have the mean of their entropies, of orders that all of them have', () => {
    expect(record.entropy).toHaveLength(1);
    const [pooled] = record.entropy;
    expect(pooled.data).toBeUndefined();
    expect(pooled.orders.map(({ k, corrected }) => [k, corrected])).toEqual([
      [0, 5],
      [1, 3.5],
    ]);
    expect(pooled.floor).toMatchObject({ point: 2, low: 1.5, high: 2.5 });
  });

  it('are a failed cell where one failed', () => {
    const failed = cell(2, 5, { more: { verified: false, failure: 'lost a bit' } });
    const [pooled] = pooledRun(madeRecord([cell(1, 4), failed])).record.cells;
    expect(pooled).toMatchObject({ verified: false, failure: 'Fold 2: lost a bit' });
  });

  it('keep what else is varied apart', () => {
    const shared = { vary: { train_share: 0.1 } };
    const all = [cell(1, 4), cell(1, 6, shared), cell(2, 5), cell(2, 7, shared)];
    const pooled = pooledRun(madeRecord(all)).record.cells;
    expect(pooled.map(({ id, rate, vary }) => [id, rate, vary])).toEqual([
      ['a/huffman@shipped/message', 4.5, undefined],
      ['a/huffman@shipped/message+train_share=0.1', 6.5, { train_share: 0.1 }],
    ]);
    expect(pooled.map(variationOfCell)).toEqual(['', '+train_share=0.1']);
  });
});

describe('a plain run', () => {
  it('is the record itself where nothing is varied', () => {
    const record = madeRecord([madeCell({ candidate: 'huffman', rate: 4 })]);
    expect(plainRun(record).record).toEqual(record);
  });

  it('leaves out what is varied, cells and entropies', () => {
    const own = madeCell({ candidate: 'huffman', rate: 4 });
    const varied = madeCell({ candidate: 'huffman', rate: 3, vary: { message_symbols: 500 } });
    const entropy = [madeEntropy([4]), madeEntropy([5], 'a+message_symbols=500')];
    const { record, foldRates } = plainRun(madeRecord([own, varied], entropy));
    expect(record.cells).toEqual([own]);
    expect(record.entropy).toEqual([entropy[0]]);
    expect(foldRates.size).toBe(0);
  });

  it('has folds pooled', () => {
    const record = madeRecord(
      [cell(1, 4), cell(2, 6)],
      [madeEntropy([4], 'a+fold=1'), madeEntropy([5], 'a+fold=2')],
    );
    const plain = plainRun(record).record;
    expect(plain.cells.map(({ rate }) => rate)).toEqual([5]);
    expect(plain.entropy.map(({ data }) => data)).toEqual([undefined]);
  });
});

describe('a loaded run with folds', () => {
  const record = madeRecord([
    cell(1, 4, { more: { message_count: 2 } }),
    cell(2, 5, { more: { message_count: 1 } }),
  ]);
  const messages = new Map([
    [
      'a/huffman@shipped/message+fold=2',
      { bits: Float64Array.of(24), symbols: Float64Array.of(5) },
    ],
    [
      'a/huffman@shipped/message+fold=1',
      { bits: Float64Array.of(8, 16), symbols: Float64Array.of(2, 3) },
    ],
  ]);

  it('has the messages of all folds, as they lie in the corpus', () => {
    const pooled = pooledLoadedRun({ record, messages });
    expect([...pooled.messages]).toEqual([
      [
        'a/huffman@shipped/message',
        { bits: Float64Array.of(8, 16, 24), symbols: Float64Array.of(2, 3, 5) },
      ],
    ]);
    expect(pooled.record.cells[0].message_bytes).toMatchObject({ mean: 2, p50: 2, max: 3 });
  });

  it('has no sizes of messages where they are of units', () => {
    const units = (one: (typeof record.cells)[number]) => ({
      ...one,
      unit_count: 3,
      units_per_message: { mean: 3, min: 3 },
    });
    const filled = { ...record, cells: record.cells.map(units) };
    const pooled = pooledLoadedRun({ record: filled, messages });
    expect(pooled.record.cells[0].message_bytes).toBeUndefined();
  });

  it('is itself without folds', () => {
    const plain = madeRecord([madeCell({ candidate: 'huffman', rate: 4 })]);
    const run = { record: plain, messages: new Map() };
    expect(pooledLoadedRun(run)).toEqual(run);
  });
});
