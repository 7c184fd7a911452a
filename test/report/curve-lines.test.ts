import { describe, expect, it } from 'vitest';
import { curvesOf } from '../../src/compare/curves.ts';
import { plainRun } from '../../src/compare/pooled-record.ts';
import { corpusSection } from '../../src/report/corpus-section.ts';
import { curveLines } from '../../src/report/curve-lines.ts';
import { curvePlot, LEAST_PLOT } from '../../src/report/curve-plot.ts';
import { type Made, madeCell, madeEntropy, madeRecord } from '../compare/curve-records.ts';

/** Layout is held by kept text; the figures in it come from records made up by hand. */

const order = (k: number, rate: number, more: Partial<Made> = {}): Made => ({
  candidate: `arith:order=${k}`,
  params: { order: k },
  interval: [0.98, 1.02],
  rate,
  ...more,
});
const learned = { tables: 'learned' };
const size = (message_symbols: number) => ({ vary: { message_symbols } });

const record = madeRecord(
  [
    order(0, 5),
    order(1, 3.4),
    order(2, 3.1),
    order(0, 5.6, learned),
    order(1, 4.2, learned),
    order(2, 4.6, learned),
    // 16 → 64 → own 100 → 1024 symbols: shipped falls a little, learned a lot.
    ...[16, 64, 1024].map((n, i) =>
      order(1, [3.9, 3.5, 3.3][i], { ...size(n), messages_as: `every=${n}` }),
    ),
    ...[16, 64, 1024].map((n, i) =>
      order(1, [6.5, 4.7, 2.9][i], { ...learned, ...size(n), messages_as: `every=${n}` }),
    ),
    ...[0.1, 0.3].map((train_share, i) => order(1, [4.4, 3.6][i], { vary: { train_share } })),
    order(1, 3.3, { vary: { align: 1 } }),
    order(1, 4.3, { vary: { align: 1, train_share: 0.1 } }),
  ].map(madeCell),
  [
    madeEntropy([4.9, 3.2, 2.2]),
    ...[16, 64, 1024].map((n) => madeEntropy([5], `a+message_symbols=${n}`)),
  ],
);

const screen = (columns: number, ascii = false): string[] =>
  curveLines(curvesOf(record), { columns, ascii, noun: 'byte' });

describe('curves on a screen', () => {
  it.each([
    ['curves', 100, false],
    ['curves', 80, false],
    ['curves-ascii', 80, true],
  ] as const)('%s at %i columns', async (name, columns, ascii) => {
    const lines = screen(columns, ascii);
    for (const line of lines) expect([...line].length, line).toBeLessThanOrEqual(columns);
    // biome-ignore lint/suspicious/noControlCharactersInRegex: all of ASCII
    if (ascii) expect(lines.join('')).toMatch(/^[\u0000-\u007f]*$/);
    await expect(`${lines.join('\n')}\n`).toMatchFileSnapshot(`screens/${name}-${columns}.txt`);
  });

  it('say what they find', () => {
    const text = screen(200).join(' ');
    // Learned lies 1.2 above at 64 symbols and 0.8 above at 100, 0.4 below at 1024.
    expect(text).toContain(
      'arith:order=1 learned overtakes its shipped tables between 100 and 1 024 symbols',
    );
    // From 0.3 to 1 are 1.74 doublings of 0.2 of 3.6 bits: 3.2 %.
    expect(text).toContain(
      'More training data still pay at the last step; gain of a doubling: A 3.2 %.',
    );
    expect(text).toContain('Least: A 3.10 at order 2, the last; B 4.20 at order 1.');
    expect(text).toContain('Combinations of what the plan varies have curves of their own');
  });

  it('show four lines, and count the others', () => {
    const many = madeRecord(
      [0, 1, 2].flatMap((k) =>
        ['', ',position=2', ',position=3', ',position=4', ',position=5', ',position=6'].map(
          (more, i) =>
            madeCell({
              candidate: `arith:order=${k}${more}`,
              params: { order: k },
              rate: 4 + i + k / 8,
            }),
        ),
      ),
    );
    const lines = curveLines(curvesOf(many), { columns: 100, ascii: false, noun: 'byte' });
    const text = lines.join(' ').replace(/ +/g, ' ');
    expect(text).toContain('2 more lines: run record.');
    expect(text).toContain('D position=4 shipped');
    expect(text).not.toContain('position=5');
  });

  it('hold the best line over orders against its other form first', () => {
    const made = [0, 1, 2].flatMap((k) =>
      [
        ['', 'shipped', 3],
        ['', 'learned', 4],
        [',backoff=none', 'shipped', 6],
        [',backoff=none', 'learned', 5],
      ].map(([form, tables, rate]) =>
        madeCell({
          candidate: `arith:order=${k}${form}`,
          params: { order: k },
          tables: String(tables),
          rate: Number(rate) - k / 8,
        }),
      ),
    );
    const lines = curveLines(curvesOf(madeRecord(made)), {
      columns: 80,
      ascii: false,
      noun: 'byte',
    });
    expect(lines.join(' ').replace(/ +/g, ' ')).toContain(
      'A arith shipped, B backoff=none shipped, C arith learned, D backoff=none learned',
    );
  });

  it('are none where nothing is varied', () => {
    expect(curveLines([], { columns: 80, ascii: false, noun: 'byte' })).toEqual([]);
  });
});

describe('the plot of a curve', () => {
  const options = { columns: 9 + LEAST_PLOT, ascii: false, title: 'x', heads: ['A'] };
  const row = (label: string, ...rates: number[]) => ({
    label,
    figures: [''],
    marks: rates.map((rate, i) => ({ mark: 'AB'[i], rate })),
  });

  it('stands over a scale from the least rate to the largest', () => {
    const [, first, middle, last] = curvePlot([row('1', 2), row('2', 3), row('3', 4)], options);
    const column = (line: string) => [...line].indexOf('A') - [...line].indexOf('│') - 1;
    expect([first, middle, last].map(column)).toEqual([
      0,
      Math.round((LEAST_PLOT - 1) / 2),
      LEAST_PLOT - 1,
    ]);
  });

  it('puts marks that fall together as one, and draws equal rates', () => {
    const lines = curvePlot([row('1', 2, 2), row('2', 4)], options);
    expect(lines[1]).toContain('│*');
    expect(curvePlot([row('1', 2)], options)[1]).toContain('│A');
  });
});

describe('folds in the table of cells', () => {
  it('are a mean with the least and the most of them', () => {
    const folds = [4, 4.5, 5].map((rate, i) =>
      madeCell({ candidate: 'huffman', rate, vary: { fold: i + 1 } }),
    );
    const entropy = [1, 2, 3].map((fold) => madeEntropy([4, 3], `a+fold=${fold}`));
    const all = madeRecord(folds, entropy, { folds: 3, symbol_count: 3000, message_count: 30 });
    const { record: plain, foldRates } = plainRun(all);
    for (const columns of [80, 100]) {
      const lines = corpusSection(plain, plain.corpora[0], { columns, foldRates });
      for (const line of lines) expect([...line].length, line).toBeLessThanOrEqual(columns);
      const at = lines.findIndex((line) => /^ {2}candidate/.test(line));
      expect(lines[at - 1]).toContain('3 folds');
      expect(lines[at]).toContain('least–most');
      // Mean, then over the floor of 2, then the spread.
      expect(lines[at + 1]).toMatch(/^ {2}huffman +shipped +4\.50 +\+2\.50 +4\.00–5\.00 /);
      expect(lines.join(' ')).toContain('Coded: 3 blocks one after another, 3 000 symbols');
    }
  });
});
