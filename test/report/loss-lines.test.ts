import { describe, expect, it } from 'vitest';
import type { CellRecord } from '../../src/harness/run-record.ts';
import { resetLines } from '../../src/report/loss-lines.ts';
import { linesRecord } from './sample-record.ts';

const [any] = linesRecord.cells;

/** A cell made up by hand: only what the lines speak of matters. */
const cell = (
  candidate: string,
  tables: string,
  reset: string,
  rate: number,
  loss: CellRecord['loss'],
): CellRecord => ({
  ...any,
  candidate,
  tables,
  reset,
  rate,
  ...(loss === undefined ? {} : { loss }),
});

describe('rate against R', () => {
  it('is one line for cells that differ only in it, with what a lost message spoils', () => {
    const cells = [
      cell('arith:order=1', 'learned', 'message*16', 4.77, { share: 0.08, per_lost_message: 8.24 }),
      cell('arith:order=1', 'learned', 'message', 5.62, { share: 0.01, per_lost_message: 1 }),
      cell('arith:order=1', 'learned', 'message*4', 5.01, { share: 0.02, per_lost_message: 2.48 }),
      cell('arith:order=1', 'shipped', 'message', 4, { share: 0.01, per_lost_message: 1 }),
      cell('arith:order=1', 'learned', 'never', 4, { share: 1, per_lost_message: 100 }),
    ];
    expect(resetLines(cells, 'byte')).toEqual([
      'arith:order=1 learned: message 5.62 (1 lost for each lost), message*4 5.01 (2.5), message*16 4.77 (8.2) bits/byte.',
    ]);
  });

  it('speaks of units where messages hold several', () => {
    const units = (messages: number) => ({
      share: 0.01,
      per_lost_message: messages,
      units_per_lost_message: 8 * messages,
    });
    const cells = [
      cell('huffman', 'learned', 'message', 5, units(1)),
      cell('huffman', 'learned', 'message*4', 4, units(2.5)),
    ];
    expect(resetLines(cells, 'byte')).toEqual([
      'huffman learned: message 5.00 (8 units for each lost message), message*4 4.00 (20) bits/byte.',
    ]);
  });

  it('shows the three of least rate, and none where no loss rate was given', () => {
    const loss = { share: 0.01, per_lost_message: 1 };
    const cells = [5, 3, 6, 4].flatMap((rate) =>
      ['message', 'message*2'].map((reset) => cell(`c${rate}`, 'learned', reset, rate, loss)),
    );
    expect(resetLines(cells, 'byte').map((line) => line.slice(0, 2))).toEqual(['c3', 'c4', 'c5']);
    const without = cells.map(({ loss: _, ...rest }) => rest);
    expect(resetLines(without, 'byte')).toEqual([]);
  });
});
