/** What is picked, and why, as limits tighten; on figures made up for it, small enough to choose from by hand. */
import { describe, expect, it } from 'vitest';
import { CellFigures, quantileBounds } from '../../src/compare/cell-figures.ts';
import { chooseAcross } from '../../src/compare/choose-corpora.ts';
import { type ChoiceTerms, chooseForCorpus } from '../../src/compare/choose-corpus.ts';
import { judge } from '../../src/compare/limits.ts';
import { readMeasured, withMeasured } from '../../src/compare/measured.ts';
import { sensitivities } from '../../src/compare/sensitivity.ts';
import { cellNamed, whyOf } from '../../src/compare/why.ts';
import type { CellRecord, RunRecord } from '../../src/harness/run-record.ts';

interface Given {
  readonly rate: number;
  readonly flash: number;
  readonly ram: number;
  readonly speed: number;
  readonly reset?: string;
  readonly alone?: boolean;
  readonly exports?: readonly 'c'[];
}

function cell(name: string, corpus: string, g: Given): CellRecord {
  return {
    id: `${corpus}/${name}@shipped/${g.reset ?? 'message'}`,
    corpus,
    candidate: name,
    coder: name,
    params: {},
    tables: 'shipped',
    reset: g.reset ?? 'message',
    reference: false,
    decodes_alone: g.alone ?? true,
    messages_as: 'every=10',
    verified: true,
    symbol_count: 1000,
    message_count: 100,
    carried_bits: g.rate * 1000,
    rate: g.rate,
    account: { floor: 1000, structure: (g.rate - 1) * 1000 },
    message_bytes: { mean: g.rate, p50: g.rate, p95: g.rate, p99: g.rate, max: g.rate },
    ...(g.exports === undefined ? {} : { exports: [...g.exports] }),
    encoder: { flash_bytes: g.flash, ram_bytes: g.ram },
    decoder: { flash_bytes: 2 * g.flash, ram_bytes: g.ram },
    encode: { speed: g.speed, low: 0.9 * g.speed, high: 1.1 * g.speed } as CellRecord['encode'],
  } as CellRecord;
}

/** Rate falls as flash grows; one needs earlier messages, one has no C form. */
const CELLS = {
  chain: { rate: 1.5, flash: 300, ram: 50, speed: 1, reset: 'never', alone: false },
  large: { rate: 2, flash: 9000, ram: 500, speed: 0.2, exports: ['c'] },
  middle: { rate: 3, flash: 2000, ram: 300, speed: 0.5, exports: ['c'] },
  noC: { rate: 3.5, flash: 500, ram: 200, speed: 0.9 },
  small: { rate: 4, flash: 400, ram: 100, speed: 2, exports: ['c'] },
  plain: { rate: 8, flash: 0, ram: 40, speed: 5, exports: ['c'] },
  worse: { rate: 8.5, flash: 9500, ram: 600, speed: 0.1, exports: ['c'] },
} as const satisfies Readonly<Record<string, Given>>;

function recordOf(cells: CellRecord[], plan: object = {}): RunRecord {
  const names = [...new Set(cells.map((c) => c.corpus))];
  return {
    plan,
    corpora: names.map((name) => ({ name, symbols_as: 'bytes', symbol_count: 1000 })),
    entropy: [],
    cells,
  } as unknown as RunRecord;
}

const record = recordOf(Object.entries(CELLS).map(([name, g]) => cell(name, 'a', g)));
const choose = (limits: ChoiceTerms['limits'], cost: ChoiceTerms['cost'] = {}) =>
  chooseForCorpus(record, new Map(), 'a', { limits, cost, end: 'encoder' });
const picked = (limits: ChoiceTerms['limits']) => choose(limits).pick?.cell.candidate;

describe('the pick', () => {
  it.each([
    ['nothing asked: the least rate', {}, 'chain'],
    ['each message alone: the chain is out', { reset: 'message' }, 'large'],
    [
      'flash up to 9000, which the large one takes',
      { reset: 'message', max: { flash_bytes: 9000 } },
      'large',
    ],
    ['one byte less', { reset: 'message', max: { flash_bytes: 8999 } }, 'middle'],
    [
      'and RAM below the middle one',
      { reset: 'message', max: { flash_bytes: 8999, ram_bytes: 299 } },
      'noC',
    ],
    [
      'and in C',
      { reset: 'message', exports: 'c' as const, max: { flash_bytes: 8999, ram_bytes: 299 } },
      'small',
    ],
    [
      'and faster than the small one',
      {
        reset: 'message',
        exports: 'c' as const,
        max: { flash_bytes: 8999 },
        min: { encode_speed: 2.1 },
      },
      'plain',
    ],
    ['faster than any', { min: { encode_speed: 6 } }, undefined],
  ])('%s', (_, limits, expected) => {
    expect(picked(limits)).toBe(expected);
  });

  it('takes sizes of the end that is the small one, or the larger of both', () => {
    const figures = (end: 'encoder' | 'decoder' | 'both') =>
      new CellFigures(record.cells[1], undefined, end).of('flash_bytes')?.value;
    expect([figures('encoder'), figures('decoder'), figures('both')]).toEqual([9000, 18000, 18000]);
  });

  it('never falls on a reference, a failed cell, or one that the plan only varies', () => {
    const others: CellRecord[] = [
      { ...cell('reference', 'a', { ...CELLS.large, rate: 0.5 }), reference: true },
      { ...cell('failed', 'a', { ...CELLS.large, rate: 0.5 }), verified: false },
      { ...cell('varied', 'a', { ...CELLS.large, rate: 0.5 }), vary: { train_share: 0.1 } },
    ];
    const all = recordOf([...others, ...record.cells]);
    const { pick, alternatives } = chooseForCorpus(all, new Map(), 'a', {
      limits: {},
      cost: {},
      end: 'both',
    });
    expect(pick?.cell.candidate).toBe('chain');
    expect(alternatives).toHaveLength(7);
  });

  it('does not take a limit for met that a cell has no figure for', () => {
    const [bare] = [{ ...cell('bare', 'a', CELLS.plain), encoder: {}, decoder: {} } as CellRecord];
    const figures = new CellFigures(bare, undefined, 'encoder');
    const [verdict] = judge(figures, { max: { flash_bytes: 100 } });
    expect(verdict).toMatchObject({ verdict: 'unknown', certain: false });
    const none = chooseForCorpus(recordOf([bare]), new Map(), 'a', {
      limits: { max: { flash_bytes: 100 } },
      cost: {},
      end: 'encoder',
    });
    expect(none.pick).toBeUndefined();
  });

  it('names the three nearest cells where nothing meets the limits, and what would have to give', () => {
    const { pick, nearest } = choose({ max: { rate: 1.9, flash_bytes: 200 } });
    expect(pick).toBeUndefined();
    // Excess: chain 100/200; large 0.1/1.9 + 8800/200; small 2.1/1.9 + 200/200; noC 1.6/1.9 + 300/200; plain 6.1/1.9.
    expect(nearest.map(({ id }) => id.slice(2, id.indexOf('@')))).toEqual([
      'chain',
      'small',
      'noC',
    ]);
    expect(nearest[0].gives).toEqual([{ key: 'max.flash_bytes', limit: 200, needed: 300 }]);
    expect(nearest[1].gives.map(({ key }) => key)).toEqual(['max.rate', 'max.flash_bytes']);
  });

  it('decides by memory among cells that the corpus cannot tell apart', () => {
    // 24 messages; the first is better by one bit in a way that changes sign from message to message.
    const pairs = (rate: number, wobble: number) => ({
      bits: Float64Array.from(
        { length: 24 },
        (_, i) => rate * 10 + (i % 2 === 0 ? wobble : -wobble),
      ),
      symbols: new Float64Array(24).fill(10),
    });
    const [a, b] = [
      cell('best', 'a', { ...CELLS.large, rate: 3 }),
      cell('lean', 'a', { ...CELLS.small, rate: 3.01 }),
    ];
    const both = recordOf(
      [a, b].map((c) => ({
        ...c,
        symbol_count: 240,
        message_count: 24,
        carried_bits: c.rate! * 240,
      })),
    );
    const messages = new Map([
      [a.id, pairs(3, 0)],
      [b.id, pairs(3.01, 5)],
    ]);
    const choice = chooseForCorpus(both, messages, 'a', { limits: {}, cost: {}, end: 'encoder' });
    expect(choice.pick?.cell.candidate).toBe('lean');
    expect(choice.tiedWith).toEqual([a.id]);
    const apart = new Map([
      [a.id, pairs(3, 0)],
      [b.id, pairs(3.01, 0)],
    ]);
    const told = chooseForCorpus(both, apart, 'a', { limits: {}, cost: {}, end: 'encoder' });
    expect(told.pick?.cell.candidate).toBe('best');
    expect(told.tiedWith).toEqual([]);
  });
});

describe('certainty and margins', () => {
  it('say whether an interval lies on one side of its limit', () => {
    const figures = new CellFigures(record.cells[2], undefined, 'encoder');
    const at = (limit: number) => judge(figures, { min: { encode_speed: limit } })[0];
    expect(at(0.4)).toMatchObject({ verdict: 'pass', certain: true, low: 0.45, high: 0.55 });
    expect(at(0.5)).toMatchObject({ verdict: 'pass', certain: false, margin: 0 });
    expect(at(0.52)).toMatchObject({ verdict: 'fail', certain: false });
    expect(at(0.6)).toMatchObject({ verdict: 'fail', certain: true });
    expect(judge(figures, { max: { flash_bytes: 4000 } })[0].margin).toBe(0.5);
  });

  it('leave the tail of message lengths open where no message bounds it', () => {
    const sorted = Float64Array.from({ length: 100 }, (_, i) => 8 * (i + 1));
    // np = 50, spread 1.96 · 5: ranks 40 and 61, from 1.
    expect(quantileBounds(sorted, 0.5)).toEqual({ low: 40, high: 61 });
    expect(quantileBounds(sorted, 0.99).high).toBe(Number.POSITIVE_INFINITY);
    expect(quantileBounds(sorted, 1)).toEqual({ low: 100, high: Number.POSITIVE_INFINITY });
  });

  it('keep 95 % of their promise for the median', () => {
    // Exact: P(40th ≤ median of the law < 61st of 100) is a sum of binomials: P(40 ≤ X ≤ 60), X ~ B(100, 1/2).
    const logChoose = (k: number) => {
      let sum = 0;
      for (let i = 1; i <= k; i++) sum += Math.log((100 - k + i) / i);
      return sum;
    };
    let mass = 0;
    for (let k = 40; k <= 60; k++) mass += Math.exp(logChoose(k) - 100 * Math.LN2);
    expect(mass).toBeGreaterThan(0.95);
  });
});

describe('what would change the pick', () => {
  const terms = (limits: ChoiceTerms['limits'], cost = {}): ChoiceTerms => ({
    limits,
    cost,
    end: 'encoder',
  });
  const of = (limits: ChoiceTerms['limits'], cost = {}) => {
    const { alternatives, goal } = choose(limits, cost);
    return sensitivities(alternatives, goal, terms(limits, cost));
  };

  it('is found at the figures of cells, exactly', () => {
    const [flash] = of({ reset: 'message', max: { flash_bytes: 3000 } });
    expect(flash.stretches).toEqual([
      { from: 1500, to: 2000, pick: 'a/noC@shipped/message' },
      { from: 2000, to: 6000, pick: 'a/middle@shipped/message' },
    ]);
    const [speed] = of({ reset: 'message', min: { encode_speed: 1.5 } });
    expect(speed.stretches).toEqual([
      { from: 0.75, to: 0.9, pick: 'a/noC@shipped/message' },
      { from: 0.9, to: 2, pick: 'a/small@shipped/message' },
      { from: 2, to: 3, pick: 'a/plain@shipped/message' },
    ]);
  });

  it('agrees with choosing anew at every value of a grid', () => {
    const limits = { reset: 'message', max: { flash_bytes: 700 } };
    const [flash] = of(limits);
    for (let value = 350; value < 1400; value += 7) {
      const stretch = flash.stretches.find(({ from, to }) => from <= value && value < to)!;
      expect(stretch.pick).toBe(choose({ ...limits, max: { flash_bytes: value } }).pick?.cell.id);
    }
  });

  it('finds the billing steps at which another message length pays, as trying each does', () => {
    // Two coders of the same mean, 10 bytes: one always, one by turns 2 and 18. Equal steps favour one or the other.
    const even = cell('even', 'a', { ...CELLS.small, rate: 4 });
    const uneven = cell('uneven', 'a', { ...CELLS.small, rate: 4 });
    const sized = (c: CellRecord): CellRecord => ({
      ...c,
      message_count: 4,
      message_bytes: { mean: 10, p50: 10, p95: 18, p99: 18, max: 18 },
      billing: { step_bytes: 8, steps: 8, steps_per_unit: 2, unused_share: 0 },
    });
    const both = recordOf([sized(even), sized(uneven)]);
    const bitsOf = (bytes: number[]) => ({
      bits: Float64Array.from(bytes, (b) => 8 * b),
      symbols: new Float64Array(4).fill(10),
    });
    const lengths = { even: [10, 10, 10, 10], uneven: [2, 18, 2, 18] };
    const messages = new Map([
      [even.id, bitsOf(lengths.even)],
      [uneven.id, bitsOf(lengths.uneven)],
    ]);
    const own: ChoiceTerms = {
      limits: {},
      cost: { price_per_megabyte: 1, units_per_day: 1, bill_step_bytes: 8 },
      end: 'encoder',
    };
    const { alternatives, goal } = chooseForCorpus(both, messages, 'a', own);
    const step = sensitivities(alternatives, goal, own).find(
      (s) => s.key === 'cost.bill_step_bytes',
    )!;
    const stepsOf = (bytes: number[], size: number) =>
      bytes.reduce((sum, b) => sum + Math.ceil(b / size), 0);
    for (let size = 4; size <= 16; size++) {
      const difference = stepsOf(lengths.even, size) - stepsOf(lengths.uneven, size);
      const { pick } = step.stretches.find(
        ({ from, to }) => from <= size && (size < to || to === 16),
      )!;
      // Where both need as many, memory and speed are equal too, and the name decides.
      expect(pick, String(size)).toBe(difference <= 0 ? even.id : uneven.id);
    }
    expect(step.stretches.length).toBeGreaterThan(1);
  });

  it('includes costs, which change the amount and not the pick', () => {
    const found = of({}, { price_per_megabyte: 2, units_per_day: 10, devices: 3 });
    expect(found.map(({ key, stretches }) => [key, stretches.length])).toEqual([
      ['cost.price_per_megabyte', 1],
      ['cost.units_per_day', 1],
      ['cost.devices', 1],
    ]);
  });
});

describe('several corpora', () => {
  const two = recordOf([
    cell('x', 'a', { ...CELLS.large, rate: 2 }),
    cell('y', 'a', { ...CELLS.large, rate: 3 }),
    cell('z', 'a', { ...CELLS.large, rate: 2.4 }),
    cell('x', 'b', { ...CELLS.large, rate: 6 }),
    cell('y', 'b', { ...CELLS.large, rate: 4 }),
    cell('z', 'b', { ...CELLS.large, rate: 4.8 }),
  ]);
  const choices = ['a', 'b'].map((corpus) =>
    chooseForCorpus(two, new Map(), corpus, { limits: {}, cost: {}, end: 'encoder' }),
  );

  it('have regrets by hand: x 0 and 50 %, y 50 % and 0, z 20 % and 20 %', () => {
    const across = chooseAcross(
      choices,
      new Map([
        ['a', 1000],
        ['b', 1000],
      ]),
      {},
    )!;
    const z = across.shared[0];
    expect(z.coder).toBe('z@shipped/message');
    expect(z.weightedRegret).toBeCloseTo(0.2, 12);
    expect(across.leastWorst?.coder).toBe('z@shipped/message');
    // Nine tenths of the weight on a: x is best on the whole (5 %), z still least bad in its worst corpus.
    const heavy = chooseAcross(choices, new Map(), { a: 0.9, b: 0.1 })!;
    expect(heavy.shared[0].coder).toBe('x@shipped/message');
    expect(heavy.shared[0].weightedRegret).toBeCloseTo(0.05, 12);
    expect(heavy.leastWorst?.coder).toBe('z@shipped/message');
    expect(heavy.leastWorst?.worstRegret).toBeCloseTo(0.2, 12);
  });

  it('weigh 1 where the plan weighs only others', () => {
    const { weights } = chooseAcross(
      choices,
      new Map([
        ['a', 7],
        ['b', 9],
      ]),
      { b: 0.25 },
    )!;
    expect([...weights]).toEqual([
      ['a', 0.8],
      ['b', 0.2],
    ]);
  });

  it('say nothing of one corpus', () => {
    expect(chooseAcross(choices.slice(0, 1), new Map([['a', 1]]), {})).toBeUndefined();
  });
});

describe('figures measured on the target', () => {
  it('take the place of declared ones, by cell or a part of its id', () => {
    const text = 'cell,flash_bytes,cycles_per_symbol\na/large,120,40\nmiddle,,11\n';
    const changed = withMeasured(record, readMeasured(text, 'device.csv', record));
    expect(changed.cells[1].encoder?.flash_bytes).toBe(120);
    expect(changed.cells[2].encoder).toMatchObject({ flash_bytes: 2000, cycles_per_symbol: 11 });
    const limits = { reset: 'message', max: { flash_bytes: 450 } };
    const before = chooseForCorpus(record, new Map(), 'a', { limits, cost: {}, end: 'encoder' });
    const after = chooseForCorpus(changed, new Map(), 'a', { limits, cost: {}, end: 'encoder' });
    expect([before.pick?.cell.candidate, after.pick?.cell.candidate]).toEqual(['small', 'large']);
  });

  it.each([
    ['no head', 'a/large,1\n', /head line/],
    ['a column nobody knows', 'cell,flash\na/large,1\n', /head line/],
    ['a cell that is not there', 'cell,flash_bytes\nnone,1\n', /names no cell/],
    ['a name of many', 'cell,flash_bytes\nshipped,1\n', /names \d+ cells/],
    ['a figure that is none', 'cell,flash_bytes\na/large,many\n', /no figure/],
    ['a cell twice', 'cell,flash_bytes\na/large,1\na/large,2\n', /stands twice/],
  ])('refuse %s, with the line', (_, text, message) => {
    expect(() => readMeasured(text, 'device.csv', record)).toThrow(message);
  });
});

describe('two cells side by side', () => {
  it('differ by their account lines', () => {
    const why = whyOf(
      record,
      new Map(),
      cellNamed(record, 'a/large'),
      cellNamed(record, 'a/middle'),
    );
    expect(why.difference).toBe(1);
    expect(why.lines).toEqual([{ line: 'structure', a: 1, b: 2 }]);
  });

  it('must be of one corpus, verified, and named', () => {
    expect(() => cellNamed(record, 'nowhere')).toThrow(/names no cells/);
    const other = cell('x', 'b', CELLS.large);
    const both = recordOf([...record.cells, other]);
    expect(() => whyOf(both, new Map(), record.cells[0], other)).toThrow(/two corpora/);
    const failed = { ...record.cells[0], verified: false };
    expect(() => whyOf(record, new Map(), failed, record.cells[1])).toThrow(/failed/);
  });
});
