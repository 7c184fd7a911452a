import { describe, expect, it } from 'vitest';
import { compareRun } from '../../src/compare/compare-run.ts';
import { comparisonLines } from '../../src/report/comparison-lines.ts';
import { type MadeUpCell, madeUpRun } from '../compare/made-up-run.ts';

const cell = (name: string, bits: readonly number[], tail = ''): MadeUpCell => ({
  id: `a/${name}@shipped/message${tail}`,
  bits,
  more: { candidate: name },
});
const even = (bits: number, messages = 48) => new Array<number>(messages).fill(bits);
const swing = (bits: number, size: number) =>
  even(bits).map((own, i) => own + (i % 4 < 2 ? size : -size));

function linesWithin(columns: number, cells: readonly MadeUpCell[]): string[] {
  const { record, messages } = madeUpRun(cells);
  return comparisonLines(record, record.corpora[0], compareRun(record, messages), columns);
}

/** Paragraphs in one line each, without their indent. */
const linesOf = (cells: readonly MadeUpCell[]) =>
  linesWithin(1000, cells).map((line) => line.trim());

describe('comparison lines', () => {
  it('say what ranks rest on, and what the nearest other cell needs more', () => {
    // 103.1 bits by 100 symbols are 0.031 bits a byte more; the swing of y hides its 2 bits.
    expect(
      linesOf([cell('x', even(100)), cell('z', even(103.1)), cell('y', swing(102, 90))]),
    ).toEqual([
      'Cells share a rank where this corpus cannot tell them from the first of that rank (sign-flip test over 24 blocks of messages, 95 %, Holm-adjusted for the 3 pairs of cells of this run).',
      'z, shipped needs 0.031 bits/byte more than x, shipped (0.031 to 0.031, over 24 blocks of messages).',
    ]);
  });

  it('say that a better rank may stand below a worse one, where it does', () => {
    const lines = linesOf([cell('x', even(100)), cell('y', even(101)), cell('z', swing(103, 90))]);
    expect(lines[0]).toContain('A better rank may stand below a worse one');
  });

  it('count the folds in which a sign held, for each of the nearest pairs', () => {
    const lines = linesOf([
      cell('x', even(100, 12), '+fold=1'),
      cell('x', even(100, 12), '+fold=2'),
      cell('y', even(110, 12), '+fold=1'),
      cell('y', even(95, 12), '+fold=2'),
      cell('z', even(150, 12), '+fold=1'),
      cell('z', even(150, 12), '+fold=2'),
    ]);
    expect(lines[0]).toMatch(
      /^More bits\/byte than x, shipped, over 24 messages, and the folds in which .* that sign\. Where marked ~ it drifts/,
    );
    expect(lines[2]).toMatch(/^cell +more +95 % interval +same sign$/);
    expect(lines[3]).toMatch(/^y, shipped +\+0\.025 +−0\.\d{3} to \+0\.\d{3} {2}~ +1 of 2$/);
    expect(lines[4]).toMatch(/^z, shipped +\+0\.500 +\+0\.500 to \+0\.500 +2 of 2$/);
  });

  it('fit into 80 columns, however long a candidate is', () => {
    const long = 'arith:order=0,position=24,counts=add:0.5,backoff=none';
    const cells = [1, 2].flatMap((fold) => [
      cell('x', even(100, 12), `+fold=${fold}`),
      cell(long, even(2345, 12), `+fold=${fold}`),
    ]);
    const lines = linesWithin(80, cells);
    for (const line of lines) expect([...line].length, line).toBeLessThanOrEqual(80);
    expect(lines.find((line) => line.includes('arith'))).toMatch(
      /^ {2}arith:order=0,position=24,.*… +\+22\.450 /,
    );
  });

  it('say why there are no ranks', () => {
    expect(linesOf([cell('x', [100]), cell('y', [200])])[0]).toMatch(
      /^No ranks: one message has no interval/,
    );
    // 10 pairs · 2^(1 − n) ≤ 0.05 from n = 9.
    expect(
      linesOf(['v', 'w', 'x', 'y', 'z'].map((name, i) => cell(name, even(100 + i, 8)))),
    ).toEqual([
      'No ranks: 8 messages cannot tell 10 pairs of cells apart; it takes 9, or fewer cells.',
    ]);
    expect(linesOf([cell('x', even(1, 5)), cell('y', even(2, 5))])).toEqual([
      'No ranks: 5 messages cannot tell two cells apart; it takes 8.',
    ]);
  });

  it('say nothing of one cell, nor of what is varied', () => {
    expect(linesOf([cell('x', even(100))])).toEqual([]);
    const lines = linesOf([
      cell('x', even(90)),
      cell('y', even(140)),
      cell('x', even(100), '+train_share=0.1'),
      cell('y', even(150), '+train_share=0.1'),
      cell('z', even(160), '+train_share=0.1'),
    ]);
    expect(lines).toEqual([
      'Cells share a rank where this corpus cannot tell them from the first of that rank (sign-flip test over 24 blocks of messages, 95 %).',
      'y, shipped needs 0.500 bits/byte more than x, shipped (0.500 to 0.500, over 24 blocks of messages).',
    ]);
  });
});
