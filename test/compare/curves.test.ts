import { describe, expect, it } from 'vitest';
import { type Curve, curvesOf } from '../../src/compare/curves.ts';
import { runRecordSchema } from '../../src/harness/run-record.ts';
import { type Made, madeCell, madeEntropy, madeRecord } from './curve-records.ts';

const curves = (...made: Made[]): Curve[] => curvesOf(madeRecord(made.map(madeCell)));
const told = (curve: Curve) => ({
  over: curve.over,
  from: curve.from,
  lines: curve.lines.map(({ candidate, tables, reset, points }) => [
    `${candidate} ${tables}/${reset}`,
    ...points.map(({ x, rate }) => [x, rate]),
  ]),
});

const arith = (order: number, rate: number, more: Partial<Made> = {}): Made => ({
  candidate: `arith:order=${order}`,
  params: { order, backoff: 'c', position: 1 },
  rate,
  ...more,
});
const pure = (order: number, rate: number): Made => ({
  candidate: `arith:order=${order},backoff=none`,
  params: { order, backoff: 'none', position: 1 },
  rate,
});

describe('curves over a parameter', () => {
  it('of orders have a line for back-off and one for the pure form, beside the entropy of each order', () => {
    const found = curves(
      arith(0, 5),
      arith(1, 4),
      arith(2, 3.5),
      pure(0, 5.1),
      pure(1, 4.5),
      pure(2, 6),
    );
    expect(found.map(told)).toEqual([
      {
        over: 'order',
        from: 'parameter',
        lines: [
          ['arith shipped/message', [0, 5], [1, 4], [2, 3.5]],
          ['arith:backoff=none shipped/message', [0, 5.1], [1, 4.5], [2, 6]],
        ],
      },
    ]);
    expect(found[0].entropy).toEqual([
      { k: 0, point: 4, low: 3.9, high: 4.1, estimable: true },
      { k: 1, point: 3, low: 2.9, high: 3.1, estimable: true },
      { k: 2, point: 2.5, low: 2.4, high: 2.6, estimable: false },
    ]);
  });

  it('need three values in one line', () => {
    expect(curves(arith(0, 5), arith(1, 4))).toEqual([]);
    // Two under each policy make no three.
    const learned = { tables: 'learned' };
    expect(curves(arith(0, 5), arith(1, 4), arith(1, 4, learned), arith(2, 3, learned))).toEqual(
      [],
    );
  });

  it('leave out cells that failed, and references', () => {
    expect(curves(arith(0, 5), arith(1, 4), arith(2, 3, { reference: true }))).toEqual([]);
    const failed = arith(2, 3, { more: { verified: false, failure: 'lost a bit' } });
    expect(curves(arith(0, 5), arith(1, 4), failed)).toEqual([]);
  });

  it('of blocks begin with plain Huffman words', () => {
    const blocks = (n: number, rate: number, maxbits?: number): Made => ({
      candidate: `block-huffman:n=${n}${maxbits === undefined ? '' : `,maxbits=${maxbits}`}`,
      params: { n, maxbits: maxbits ?? 24 },
      rate,
    });
    const single: Made = { candidate: 'huffman', params: { maxbits: 24 }, rate: 5 };
    expect(curves(single, blocks(2, 4), blocks(3, 3.5)).map(told)).toEqual([
      {
        over: 'n',
        from: 'parameter',
        lines: [['block-huffman shipped/message', [1, 5], [2, 4], [3, 3.5]]],
      },
    ]);
    // Words of another length limit are another line.
    expect(curves(single, blocks(2, 4, 16), blocks(3, 3.5, 16))).toEqual([]);
    // A block of one that was run stands for itself.
    const [own] = curves(blocks(1, 5.2), single, blocks(2, 4));
    expect(own).toBeUndefined();
    const [ran] = curves(blocks(1, 5.2), blocks(2, 4), blocks(3, 3), single);
    expect(told(ran).lines[0][1]).toEqual([1, 5.2]);
  });

  it('of sets of tables begin with one table', () => {
    const sets = (k: number, rate: number): Made => ({
      candidate: `huffman:tables_in_set=${k}`,
      params: { maxbits: 24, tables_in_set: k },
      rate,
    });
    const one: Made = { candidate: 'huffman', params: { maxbits: 24 }, rate: 5 };
    expect(curves(one, sets(2, 4.5), sets(4, 4.4)).map(told)).toEqual([
      {
        over: 'tables_in_set',
        from: 'parameter',
        lines: [['huffman shipped/message', [1, 5], [2, 4.5], [4, 4.4]]],
      },
    ]);
  });

  it('are there for every numeric parameter, whatever it is called', () => {
    const rice = (k: number, after = ''): Made => ({
      candidate: `rice:k=${k}${after}`,
      params: { k, ...(after === '' ? {} : { after: 'delta' }) },
      rate: 8 - k,
    });
    const found = curves(
      rice(0),
      rice(1),
      rice(2),
      ...[0, 1, 2].map((k) => rice(k, ',after=delta')),
    );
    expect(found.map(told)).toEqual([
      {
        over: 'k',
        from: 'parameter',
        lines: [
          ['rice shipped/message', [0, 8], [1, 7], [2, 6]],
          ['rice:after=delta shipped/message', [0, 8], [1, 7], [2, 6]],
        ],
      },
    ]);
  });
});

describe('curves over resets', () => {
  const cell = (reset: string, rate: number, tables = 'learned'): Made => ({
    candidate: 'arith:order=1',
    params: { order: 1 },
    tables,
    reset,
    rate,
  });

  it('go over R, and message is 1', () => {
    const found = curves(
      cell('message', 6),
      cell('message*16', 4.5),
      cell('message*4', 5),
      cell('never', 4),
      cell('message', 4, 'shipped'),
    );
    expect(found.map(told)).toEqual([
      {
        over: 'reset',
        from: 'reset',
        lines: [['arith:order=1 learned/message*R', [1, 6], [4, 5], [16, 4.5]]],
      },
    ]);
    expect(found[0].lines[0].points[2].cell).toBe('a/arith:order=1@learned/message*16');
  });

  it('need three values', () => {
    expect(curves(cell('message', 6), cell('message*4', 5), cell('never', 4))).toEqual([]);
  });
});

describe('curves over what a plan varies', () => {
  it('hold the plan’s own value, and keep all else the same', () => {
    const shipped = (rate: number, vary?: Made['vary']) =>
      arith(1, rate, vary === undefined ? {} : { vary });
    const found = curves(
      shipped(4),
      shipped(5, { train_share: 0.1 }),
      shipped(3.9, { align: 1 }),
      shipped(4.9, { align: 1, train_share: 0.1 }),
      arith(1, 6, { tables: 'learned' }),
    );
    expect(found.map((curve) => [curve.variation, told(curve)])).toEqual([
      [
        '',
        {
          over: 'train_share',
          from: 'vary',
          lines: [['arith:order=1 shipped/message', [0.1, 5], [1, 4]]],
        },
      ],
      [
        '+align=1',
        {
          over: 'train_share',
          from: 'vary',
          lines: [['arith:order=1 shipped/message', [0.1, 4.9], [1, 3.9]]],
        },
      ],
      [
        '',
        {
          over: 'align',
          from: 'vary',
          lines: [['arith:order=1 shipped/message', [1, 3.9], [8, 4]]],
        },
      ],
      [
        '+train_share=0.1',
        {
          over: 'align',
          from: 'vary',
          lines: [['arith:order=1 shipped/message', [1, 4.9], [8, 5]]],
        },
      ],
    ]);
  });

  it('over message sizes hold the corpus’s own where its framing fixes one', () => {
    const cells = [
      madeCell(arith(1, 4)),
      madeCell(arith(1, 5, { vary: { message_symbols: 20 } })),
      madeCell(arith(1, 3, { vary: { message_symbols: 500 } })),
    ];
    const xs = (corpus: object) =>
      curvesOf(madeRecord(cells, undefined, corpus))[0].lines[0].points.map(({ x }) => x);
    expect(xs({})).toEqual([20, 100, 500]);
    const { message_symbols: _, ...whole } = madeRecord(cells).corpora[0];
    const record = { ...madeRecord(cells), corpora: [whole] };
    expect(curvesOf(record)[0].lines[0].points.map(({ x }) => x)).toEqual([20, 500]);
  });

  it('pool folds, so that each point is a mean', () => {
    const fold = (k: number, rate: number, share?: number) =>
      madeCell(
        arith(1, rate, {
          vary: { ...(share === undefined ? {} : { train_share: share }), fold: k },
        }),
      );
    const record = madeRecord(
      [fold(1, 4), fold(1, 5, 0.1), fold(2, 4.5), fold(2, 6, 0.1)],
      [madeEntropy([4], 'a+fold=1'), madeEntropy([5], 'a+fold=2')],
      { folds: 2 },
    );
    expect(runRecordSchema.safeParse(record).error?.issues).toBeUndefined();
    expect(curvesOf(record).map(told)).toEqual([
      {
        over: 'train_share',
        from: 'vary',
        lines: [['arith:order=1 shipped/message', [0.1, 5.5], [1, 4.25]]],
      },
    ]);
  });
});

describe('the margin of a point', () => {
  const margin = (more: Partial<Made>) =>
    curves(arith(0, 5), arith(1, 4, { interval: [0.9, 1.05], ...more }), arith(2, 3))[0].lines[0]
      .points[1].margin;

  it('is the wider side of the interval of the mean over messages', () => {
    // A tenth of 4 below, a twentieth above.
    expect(margin({})).toBeCloseTo(0.4, 12);
    expect(margin({ messages_as: 'records=5' })).toBeCloseTo(0.4, 12);
  });

  it('is not given where messages differ in length', () => {
    expect(margin({ messages_as: 'lines' })).toBeUndefined();
    // 1000 symbols in 10 messages of 101, or of whole threes: the last is shorter.
    expect(margin({ messages_as: 'every=101' })).toBeUndefined();
    expect(margin({ messages_as: 'records=3' })).toBeUndefined();
  });
});
