import { describe, expect, test } from 'vitest';
import type { CellRecord } from '../../src/harness/run-record.ts';
import { speedText } from '../../src/report/figures.ts';
import { speedNotes, timeLines } from '../../src/report/time-lines.ts';
import { linesRecord } from './sample-record.ts';

/** Cells of the sample record with other times: the figures are made up by hand. */
function withTimes(
  change: (end: NonNullable<CellRecord['encode']>) => Partial<NonNullable<CellRecord['encode']>>,
  more: Partial<CellRecord> = {},
): CellRecord[] {
  return linesRecord.cells.map((cell) => ({
    ...cell,
    ...more,
    encode: { ...cell.encode!, ...change(cell.encode!) },
  }));
}

describe('a speed', () => {
  test.each([
    [0.3, 0.28, 0.32, '×0.30'],
    // Further than a quarter either way: the second digit says nothing.
    [0.34, 0.2, 0.5, '×0.3'],
    [1.24, 1.2, 1.3, '×1.2'],
    [12.4, 12, 13, '×12'],
    [12.4, 6, 20, '×10'],
    [0.0213, 0.021, 0.022, '×0.021'],
  ])('of %f in %f to %f is written %s', (speed, low, high, text) => {
    expect(speedText({ speed, low, high })).toBe(text);
  });
});

describe('the table of times', () => {
  const table = (cells: readonly CellRecord[], columns = 120) =>
    timeLines(cells, 'byte', columns).join('\n');

  test('has the intervals of speeds, and in symbols of the pacer what is timed apart', () => {
    const text = table(linesRecord.cells);
    expect(text).toMatch(/arith:order=1 +shipped +message +×0\.24 to 0\.26 +×0\.19 to 0\.21 /);
    expect(text).toMatch(/in bytes that the pacer codes meanwhile/);
    expect(text).toMatch(/12 \/ 12 +4 000 \/ 4 000 +30 000/);
    expect(text).toMatch(/12 \/ 12 +4 000 \/ 4 000 +–/);
  });

  test('says of a cost that may be none only what it is below, and of a gain that it is one', () => {
    const perMessage = (low: number, middle: number, high: number) => ({
      per_message: { seconds: 0, pacer_symbols: middle, low, high },
    });
    expect(table(withTimes(() => perMessage(-4, 8, 21.4)))).toMatch(/<21 \/ 12/);
    expect(table(withTimes(() => perMessage(-310, -293, -250)))).toMatch(/−290 \/ 12/);
    expect(table(withTimes(() => perMessage(-9, -5, 0)))).toMatch(/<1 \/ 12/);
  });

  test('leaves out what it has no room for, the last first, and is not there below 100 columns', () => {
    const narrow = table(linesRecord.cells, 100);
    for (const line of narrow.split('\n')) expect([...line].length).toBeLessThanOrEqual(100);
    const cells = linesRecord.cells.map((cell) => ({
      ...cell,
      candidate: cell.candidate.padEnd(36, '+'),
    }));
    const tight = table(cells, 110);
    expect(tight).toMatch(/a message/);
    expect(tight).not.toMatch(/training/);
    expect(table(linesRecord.cells, 99)).toBe('');
  });

  test('is not there where nothing was timed', () => {
    const cells = linesRecord.cells.map(({ encode: _, decode: __, ...cell }) => cell);
    expect(timeLines(cells, 'byte', 120)).toEqual([]);
    expect(speedNotes(cells)).toEqual([]);
  });

  test('has no column of messages where there is one, or where they are filled', () => {
    const cells = linesRecord.cells.map((cell) => {
      const { per_message: _, ...encode } = cell.encode!;
      const { per_message: __, ...decode } = cell.decode!;
      return { ...cell, encode, decode };
    });
    expect(table(cells)).not.toMatch(/a message/);
    expect(table(cells)).toMatch(/set-up/);
  });

  test('tells how many cells it leaves out', () => {
    const many = [...linesRecord.cells, ...linesRecord.cells].map((cell, i) => ({
      ...cell,
      id: `${i}`,
    }));
    expect(table(many)).toMatch(/The other 2 cells: run record\./);
    expect(table(many.slice(0, 7))).toMatch(/The other cell: run record\./);
  });
});

describe('the note on speeds', () => {
  const note = (cells: readonly CellRecord[]) => speedNotes(cells).join(' ');

  test('names the pacer', () => {
    expect(note(linesRecord.cells)).toMatch(/the pacer \(deflate-huffman, the same symbols/);
    const timed = { pacer: 'fixed', symbol_count: 60_000, message_count: 1000 };
    expect(note(withTimes(() => ({}), { timed }))).toMatch(/the pacer \(fixed, /);
  });

  test('counts and explains unsteady speeds, and marks them in the table', () => {
    expect(note(linesRecord.cells)).not.toMatch(/~/);
    const cells = withTimes(() => ({ unsteady: true }));
    expect(note(cells)).toMatch(/~ marks 4 of 8 speeds/);
    expect(timeLines(cells, 'byte', 120).join('\n')).toMatch(/×0\.24 to 0\.26~ /);
  });

  test('says where there are too few samples for an interval', () => {
    expect(note(linesRecord.cells)).not.toMatch(/too narrow/);
    expect(note(withTimes(() => ({ seconds: [1, 1, 1, 1, 1] })))).toMatch(
      /the least number here is 5/,
    );
  });

  test('says where only the beginning was timed', () => {
    expect(note(linesRecord.cells)).not.toMatch(/beginning/);
    const timed = { pacer: 'fixed', symbol_count: 16_384, message_count: 300 };
    expect(note(withTimes(() => ({}), { timed }))).toMatch(/the beginning is timed/);
  });
});
