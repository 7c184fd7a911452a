import { describe, expect, it } from 'vitest';
import { comparedBits, contenderGroups, partsOfId } from '../../src/compare/contenders.ts';
import { madeUpRun } from './made-up-run.ts';

const sumOf = (values: Iterable<number>) => [...values].reduce((sum, value) => sum + value, 0);

describe('partsOfId', () => {
  it('takes the fold out of an id, wherever it stands', () => {
    const base = 'a/arith:order=1@shipped/message';
    expect(partsOfId(base)).toEqual({ base, variation: '', fold: 0 });
    expect(partsOfId(`${base}+fold=12`)).toEqual({ base, variation: '', fold: 12 });
    expect(partsOfId(`${base}+train_share=0.1+fold=2`)).toEqual({
      base: `${base}+train_share=0.1`,
      variation: '+train_share=0.1',
      fold: 2,
    });
    expect(partsOfId(`${base}+fold=2+align=1`)).toEqual({
      base: `${base}+align=1`,
      variation: '+align=1',
      fold: 2,
    });
    expect(partsOfId('a+b/rice:k=2@none/message*8')).toMatchObject({ variation: '' });
  });
});

describe('comparedBits', () => {
  const pairs = {
    bits: Float64Array.of(500, 100, 0, 300),
    symbols: Float64Array.of(10, 10, 0, 30),
  };
  const cellOf = (id: string, more: object) =>
    madeUpRun([{ id, bits: [900], more }]).record.cells[0];

  it('leaves messages as they are where nothing is sent once', () => {
    const cell = cellOf('a/huffman@sent/message', { account: { tables: 400 } });
    expect([...comparedBits(cell, pairs)]).toEqual([500, 100, 0, 300]);
  });

  it('spreads tables that are sent once, and the alphabet map, over all symbols', () => {
    const sent = cellOf('a/huffman@sent/never', { account: { tables: 400 } });
    expect([...comparedBits(sent, pairs)]).toEqual([180, 180, 0, 540]);
    // 50 bits of the tables are the map, which stands before the messages.
    const mapped = cellOf('a/huffman@sent/never', { account: { tables: 450 }, carried_bits: 950 });
    expect([...comparedBits(mapped, pairs)]).toEqual([190, 190, 0, 570]);
    const learned = cellOf('a/arith:order=0@learned/never', { carried_bits: 950 });
    expect([...comparedBits(learned, pairs)]).toEqual([510, 110, 0, 330]);
    expect(sumOf(comparedBits(mapped, pairs))).toBe(950);
  });
});

describe('contenderGroups', () => {
  it('holds verified cells that are no references, best first, each with its carried bits', () => {
    const { record, messages } = madeUpRun([
      { id: 'a/x@none/message', bits: [80, 90, 70] },
      { id: 'a/y@none/message', bits: [50, 60, 70] },
      { id: 'a/z@none/message', bits: [1, 1, 1], more: { reference: true } },
      { id: 'a/w@none/message', bits: [1, 1, 1], more: { verified: false } },
      { id: 'b/x@none/message', bits: [5, 5] },
    ]);
    const [a, b] = contenderGroups(record, messages);
    expect(a).toMatchObject({ corpus: 'a', variation: '', blocks: { count: 3, unit: 'messages' } });
    expect(a.contenders.map((one) => [one.id, one.rate])).toEqual([
      ['a/y@none/message', 0.6],
      ['a/x@none/message', 0.8],
    ]);
    expect([...a.contenders[1].blockBits]).toEqual([80, 90, 70]);
    expect([...a.blockSymbols]).toEqual([100, 100, 100]);
    expect(b.corpus).toBe('b');
  });

  it('keeps what the plan varies apart, and puts folds one after another', () => {
    const cell = (candidate: string, tail: string, bits: number[]) => ({
      id: `a/${candidate}@shipped/message${tail}`,
      bits,
    });
    const { record, messages } = madeUpRun([
      cell('x', '+train_share=0.1+fold=1', [1, 2]),
      cell('x', '+train_share=0.1+fold=2', [3]),
      cell('y', '+train_share=0.1+fold=2', [30]),
      cell('y', '+train_share=0.1+fold=1', [10, 20]),
      cell('w', '+train_share=0.1+fold=1', [0, 0]),
      cell('x', '+train_share=1+fold=1', [1, 1]),
      cell('x', '+train_share=1+fold=2', [1]),
    ]);
    const groups = contenderGroups(record, messages);
    expect(groups.map((group) => [group.variation, group.contenders.length])).toEqual([
      // w has no cell in the second fold.
      ['+train_share=0.1', 2],
      ['+train_share=1', 1],
    ]);
    const [x, y] = groups[0].contenders;
    expect(x.id).toBe('a/x@shipped/message+train_share=0.1');
    expect([...x.blockBits]).toEqual([1, 2, 3]);
    expect([...y.blockBits]).toEqual([10, 20, 30]);
    expect([...y.foldBits]).toEqual([30, 30]);
    expect(y.cellIds.map((id) => partsOfId(id).fold)).toEqual([1, 2]);
  });

  it('has nothing where nothing is known or coded', () => {
    const { record, messages } = madeUpRun([{ id: 'a/x@none/message', bits: [8], symbols: [0] }]);
    expect(contenderGroups(record, messages)).toEqual([]);
    expect(contenderGroups(record, new Map())).toEqual([]);
  });
});
