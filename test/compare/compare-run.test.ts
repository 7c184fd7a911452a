import { describe, expect, it } from 'vitest';
import { compareCells } from '../../src/compare/compare-cells.ts';
import { compareRun, ranksOf } from '../../src/compare/compare-run.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { holmAdjusted } from '../../src/statistics/holm.ts';
import { type MadeUpCell, madeUpRun } from './made-up-run.ts';

const MESSAGES = 24;
const even = (bits: number, messages = MESSAGES) => new Array<number>(messages).fill(bits);
const cell = (name: string, bits: readonly number[], tail = ''): MadeUpCell => ({
  id: `${name}@none/message${tail}`,
  bits,
});

/** Draws of a normal law with mean 0 and variance 1 (Box & Muller 1958). */
function normalDraws(seed: string): () => number {
  const generator = new SeededGenerator(seed);
  return () =>
    Math.sqrt(-2 * Math.log(1 - generator.real())) * Math.cos(2 * Math.PI * generator.real());
}

/** Ranks in the order of the cells. */
const ranksIn = (cells: readonly MadeUpCell[]) => {
  const { record, messages } = madeUpRun(cells);
  const { rankOf } = ranksOf(record, messages);
  return cells.map(({ id }) => rankOf.get(id));
};

describe('compareRun', () => {
  it('adjusts the share of sign choices for all pairs of all corpora', () => {
    // Over 24 even differences 2 of 2^24 choices of signs are as far from 0; twelve of each sign are as near as can be.
    const wave = even(200).map((bits, i) => bits + (i % 2 === 0 ? 10 : -10));
    const { record, messages } = madeUpRun([
      cell('a/x', even(200)),
      cell('a/y', wave),
      cell('a/z', even(210)),
      cell('b/x', even(200)),
      cell('b/y', even(300)),
    ]);
    const { comparisons, ranks } = compareRun(record, messages);
    expect(comparisons.map(({ a, b }) => [a, b].map((id) => id.split('@')[0]))).toEqual([
      ['a/x', 'a/y'],
      ['a/x', 'a/z'],
      ['b/x', 'b/y'],
    ]);
    const least = 2 ** -23;
    expect(comparisons.map((c) => c.p)).toEqual([1, least, least]);
    // y and z differ by 0 and 20 bits in turns: as far from 0 only where all twelve 20s have one sign.
    const all = holmAdjusted([1, least, 2 ** -11, least]);
    expect(comparisons.map((c) => c.adjustedP)).toEqual([all[0], all[1], all[3]]);
    expect(comparisons.map((c) => c.decided)).toEqual([false, true, true]);
    expect(ranks.groups).toEqual([
      {
        corpus: 'a',
        variation: '',
        cells: ['a/x@none/message', 'a/y@none/message', 'a/z@none/message'],
        units: 24,
        unit: 'messages',
        pairs: 4,
      },
      {
        corpus: 'b',
        variation: '',
        cells: ['b/x@none/message', 'b/y@none/message'],
        units: 24,
        unit: 'messages',
        pairs: 4,
      },
    ]);
    expect(comparisons[1]).toMatchObject({ difference: 0.1, units: 24, unit: 'messages' });
    expect(comparisons[1].low).toBeCloseTo(0.1, 12);
    expect(comparisons[1].high).toBeCloseTo(0.1, 12);
  });

  it('ranks what it cannot tell apart equal, the leader deciding', () => {
    const swing = (mean: number, size: number) =>
      even(mean).map((bits, i) => bits + (i % 2 === 0 ? size : -size));
    // The second is told from the first by an even bit a message; the third is worse, but swings by 200 bits.
    expect(
      ranksIn([cell('a/x', even(100)), cell('a/y', even(101)), cell('a/z', swing(103, 200))]),
    ).toEqual([1, 3, 1]);
    expect(
      ranksIn([cell('a/y', even(101)), cell('a/x', even(100)), cell('a/z', even(100))]),
    ).toEqual([3, 1, 1]);
  });

  it('gives references and failed cells no rank, and one cell alone the first', () => {
    const { record, messages } = madeUpRun([
      cell('a/x', even(100)),
      { ...cell('a/deflate', even(90)), more: { reference: true } },
      { ...cell('a/y', even(80)), more: { verified: false } },
    ]);
    expect([...ranksOf(record, messages).rankOf]).toEqual([['a/x@none/message', 1]]);
  });

  it('has no ranks where the messages are too few for any pair, and says how many it takes', () => {
    const few = (messages: number, cells: number) => {
      const { record, messages: pairs } = madeUpRun(
        Array.from({ length: cells }, (_, i) => cell(`a/c${i}`, even(100 + 10 * i, messages))),
      );
      return compareRun(record, pairs);
    };
    const one = few(1, 3);
    expect(one.comparisons).toEqual([]);
    expect(one.ranks.rankOf.size).toBe(0);
    // 3 pairs · 2^(1 − n) ≤ 0.05 from n = 7; below 8 no interval is drawn.
    expect(one.ranks.groups[0]).toMatchObject({ units: 1, unitsNeeded: 8, pairs: 0 });
    expect(few(7, 3).ranks.groups[0].unitsNeeded).toBe(8);
    expect([...few(8, 3).ranks.rankOf.values()]).toEqual([1, 2, 3]);
    // 45 pairs · 2^−9 = 0.088, 45 · 2^−10 = 0.044.
    const ten = few(10, 10);
    expect(ten.ranks.groups[0].unitsNeeded).toBe(11);
    expect(ten.comparisons.length).toBe(9);
    expect(ten.comparisons.some((c) => c.decided)).toBe(false);
    expect([...few(11, 10).ranks.rankOf.values()]).toEqual([1, 2, 3, 4, 5, 6, 7, 8, 9, 10]);
  });

  it('leaves a corpus that cannot tell anything out of the pairs of the others', () => {
    const { record, messages } = madeUpRun([
      cell('a/x', even(100, 8)),
      cell('a/y', even(101, 8)),
      ...Array.from({ length: 30 }, (_, i) => cell(`b/c${i}`, even(100 + i, 3))),
    ]);
    const { ranks } = compareRun(record, messages);
    expect(ranks.groups.map((group) => [group.pairs, group.unitsNeeded])).toEqual([
      [1, undefined],
      [1, 15],
    ]);
    expect(ranks.rankOf.get('a/y@none/message')).toBe(2);
  });

  it('pools folds, and counts in how many the sign held', () => {
    const fold = (name: string, n: number, bits: number) =>
      cell(name, even(bits, 12), `+fold=${n}`);
    const { record, messages } = madeUpRun([
      fold('a/x', 1, 100),
      fold('a/x', 2, 100),
      fold('a/x', 3, 100),
      fold('a/y', 1, 110),
      fold('a/y', 2, 140),
      fold('a/y', 3, 95),
    ]);
    const { comparisons, ranks } = compareRun(record, messages);
    expect(comparisons).toHaveLength(1);
    expect(comparisons[0]).toMatchObject({
      a: 'a/x@none/message',
      b: 'a/y@none/message',
      units: 24,
      unit: 'blocks of messages',
      folds: { count: 3, sameSign: 2 },
    });
    // (10 + 40 − 5) · 12 bits over 3600 symbols.
    expect(comparisons[0].difference).toBeCloseTo(0.15, 12);
    expect([...ranks.rankOf.keys()].sort()).toEqual(
      [...record.cells.map((c) => c.id), 'a/x@none/message', 'a/y@none/message'].sort(),
    );
  });

  it('adjusts each variation for itself', () => {
    const { record, messages } = madeUpRun([
      cell('a/x', even(100)),
      cell('a/y', even(101)),
      ...['x', 'y', 'z'].map((name, i) => cell(`a/${name}`, even(100 + i), '+align=1')),
      ...['x', 'y', 'z'].map((name, i) => cell(`b/${name}`, even(100 + i), '+align=1')),
    ]);
    const { groups, rankOf } = ranksOf(record, messages);
    expect(groups.map((group) => [group.corpus, group.variation, group.pairs])).toEqual([
      ['a', '', 1],
      ['a', '+align=1', 6],
      ['b', '+align=1', 6],
    ]);
    expect(rankOf.get('b/z@none/message+align=1')).toBe(3);
  });

  it('is the same whatever the order of the cells', () => {
    const draw = normalDraws('order');
    const cells = Array.from({ length: 6 }, (_, i) =>
      cell(
        `a/c${i}`,
        even(100 + 2 * i, 60).map((bits) => bits + 4 * draw()),
      ),
    );
    const one = madeUpRun(cells);
    const other = madeUpRun([...cells].reverse());
    const found = compareRun(one.record, one.messages);
    expect(compareRun(other.record, other.messages).comparisons).toEqual(found.comparisons);
    expect([...ranksOf(other.record, other.messages).rankOf].sort()).toEqual(
      [...found.ranks.rankOf].sort(),
    );
  });
});

describe('real differences', () => {
  it('of one and a half standard deviations of a block are told in nearly all runs of six cells', () => {
    const draw = normalDraws('real');
    const trials = 60;
    let told = 0;
    for (let trial = 0; trial < trials; trial++) {
      const cells = Array.from({ length: 6 }, (_, i) =>
        // Differences of two cells vary by √2 · 5 bits; the last needs 1.5 times that more.
        cell(
          `a/c${i}`,
          even(i === 5 ? 800 + 1.5 * Math.SQRT2 * 5 : 800).map((own) => own + 5 * draw()),
        ),
      );
      if (ranksIn(cells)[5] === 6) told++;
    }
    // A mean of 24 differences lies 7.3 of its standard errors from 0, its least among five about 6: p is below 1e−4.
    expect(told / trials).toBeGreaterThan(0.9);
  });
});

describe('false alarms', () => {
  it('split equal cells in at most 5 % of runs, however many cells there are', () => {
    const draw = normalDraws('equal cells');
    const trials = 150;
    let split = 0;
    for (let trial = 0; trial < trials; trial++) {
      const difficulty = Array.from({ length: MESSAGES }, () => 50 * draw());
      const cells = Array.from({ length: 8 }, (_, i) =>
        cell(
          `a/c${i}`,
          difficulty.map((own) => 800 + own + 5 * draw()),
        ),
      );
      if (ranksIn(cells).some((rank) => rank !== 1)) split++;
    }
    // 5 % and three standard errors of it over the trials.
    expect(split / trials).toBeLessThanOrEqual(0.05 + 3 * Math.sqrt((0.05 * 0.95) / trials));
  });

  it('stay near 5 % where neighbouring messages are alike', () => {
    const draw = normalDraws('neighbours');
    const trials = 300;
    const messages = 2400;
    let alarms = 0;
    for (let trial = 0; trial < trials; trial++) {
      // Each difference keeps nine tenths of the one before it.
      let state = draw();
      const bits = Float64Array.from({ length: messages }, () => {
        state = 0.9 * state + Math.sqrt(1 - 0.81) * draw();
        return 100 + state;
      });
      const symbols = new Float64Array(messages).fill(100);
      const found = compareCells(
        'a',
        { id: 'x', pairs: { bits: new Float64Array(messages).fill(100), symbols } },
        { id: 'y', pairs: { bits, symbols } },
      )!;
      if (found.decided) alarms++;
    }
    // Messages as units would give √19 times too narrow a law: 65 % of false alarms.
    expect(alarms / trials).toBeLessThanOrEqual(0.05 + 3 * Math.sqrt((0.05 * 0.95) / trials));
  });
});

describe('compareCells', () => {
  const side = (id: string, bits: readonly number[]) => ({
    id,
    pairs: { bits: Float64Array.from(bits), symbols: new Float64Array(bits.length).fill(10) },
  });

  it('says nothing of too few messages, or of other messages', () => {
    expect(compareCells('a', side('x', even(1, 7)), side('y', even(2, 7)))).toBeUndefined();
    expect(compareCells('a', side('x', even(1, 8)), side('y', even(2, 9)))).toBeUndefined();
    expect(compareCells('a', side('x', even(1, 99)), side('y', even(2, 99)), 15)).toBeUndefined();
  });

  it('decides by its own p-value', () => {
    const found = compareCells('a', side('x', even(1, 8)), side('y', even(2, 8)))!;
    expect(found).toMatchObject({ a: 'x', b: 'y', units: 8, unit: 'messages', decided: true });
    expect(found.p).toBe(2 ** -7);
    expect(found.adjustedP).toBe(found.p);
    expect(found.difference).toBeCloseTo(0.1, 12);
  });
});
