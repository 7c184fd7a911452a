import { describe, expect, test } from 'vitest';
import { compareCellSpeeds, type TimedCell } from '../../src/compare/cell-speeds.ts';
import type { CellRecord, RunRecord } from '../../src/harness/run-record.ts';
import { linesRecord } from '../report/sample-record.ts';

type Times = NonNullable<CellRecord['encode']>;

/** A cell of the sample record whose encoder takes so long, a little more from turn to turn; the pacer 20 ms. */
function timedCell(
  seconds: number,
  more: Partial<Times> = {},
  cell: Partial<CellRecord> = {},
  environment: Partial<RunRecord['environment']> = {},
): TimedCell {
  const encode: Times = {
    ...linesRecord.cells[0].encode!,
    seconds: Array.from({ length: 20 }, (_, i) => seconds * (1 + i * 1e-4)),
    pacer_seconds: new Array<number>(20).fill(0.02),
    ...more,
  };
  return {
    environment: { ...linesRecord.environment, ...environment },
    cell: { ...linesRecord.cells[0], encode, ...cell },
  };
}

describe('two speeds of cells', () => {
  test.each([
    [0.011, 'slower'],
    [0.01, 'alike'],
    [0.009, 'faster'],
  ])('10 ms and %f s: the second is %s', (seconds, verdict) => {
    expect(compareCellSpeeds(timedCell(0.01), timedCell(seconds), 'encode')).toMatchObject({
      ratio: expect.closeTo(seconds / 0.01, 6),
      verdict,
      unsteady: false,
    });
  });

  test('are compared at the end asked for', () => {
    const [a, b] = [timedCell(0.01), timedCell(0.02)];
    expect(compareCellSpeeds(a, b, 'decode')).toMatchObject({ ratio: expect.closeTo(1, 9) });
  });

  test('say where one was timed on an uneven machine', () => {
    const uneven = timedCell(0.01, { unsteady: true });
    expect(compareCellSpeeds(timedCell(0.01), uneven, 'encode')).toMatchObject({ unsteady: true });
  });

  const timed = { pacer: 'deflate-huffman', symbol_count: 60_000, message_count: 1000 };
  test.each([
    [
      timedCell(0.01, {}, {}, { class: 'another' }),
      /machines of different classes: .* and another/,
    ],
    [
      timedCell(0.01, {}, { timed: { ...timed, pacer: 'fixed' } }),
      /pacers: deflate-huffman and fixed/,
    ],
    [
      timedCell(0.01, {}, { timed: { ...timed, symbol_count: 100 } }),
      /data: 60000 and 100 symbols/,
    ],
    [timedCell(0.01, {}, { encode: undefined, id: 'other' }), /^other was not timed/],
  ])('are not compared where they do not mean the same', (other, reason) => {
    expect(compareCellSpeeds(timedCell(0.01), other, 'encode')).toMatch(reason);
  });
});
