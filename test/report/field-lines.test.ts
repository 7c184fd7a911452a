import { describe, expect, it } from 'vitest';
import type { CellRecord } from '../../src/harness/run-record.ts';
import { fieldLines } from '../../src/report/field-lines.ts';

/** Made up by hand: 100 records of 4 bytes. */
const cell: CellRecord = {
  id: 'uplink/fields:auto@shipped/message',
  corpus: 'uplink',
  candidate: 'fields:auto',
  coder: 'fields',
  params: {},
  tables: 'shipped',
  reset: 'message',
  reference: false,
  decodes_alone: true,
  messages_as: 'records=10',
  verified: true,
  symbol_count: 400,
  message_count: 10,
  fields: [
    { name: 'dt', bits: 150, choice: 'xor/value' },
    { name: 'supply', bits: 900, choice: 'delta2/last' },
    { name: 'a_name_that_is_longer_than_most', bits: 20, choice: 'delta/field:supply' },
    { name: '@3', bits: 0, choice: 'raw' },
    { name: 'probe', bits: 50, choice: 'linear:supply:dt/was:dt/first:supply' },
    { name: 'signal', bits: 50, choice: 'delta/at:dt' },
  ],
};

describe('the fields of a record on a screen', () => {
  it('have a line each, with a bar of the letter of their transform', () => {
    expect(fieldLines(cell, 4, 100)).toEqual([
      ' Fields of fields:auto, shipped: 11.70 bits a record, framing and ends not counted. One letter =',
      ' 0.5 bit/record and names the transform: r raw, d delta, 2 delta2, x xor, l linear.',
      '',
      '  field                 bits/record  transform  context',
      '  dt                           1.50  xor        own last value        xxx',
      '  supply                       9.00  delta2     own last difference   222222222222222222',
      '  a_name_that_is_long…         0.20  delta      difference of supply',
      '  @3                           0.00  raw',
      '  probe                        0.50  linear     last value of dt      l',
      '  signal                       0.50  delta      value of dt           d',
    ]);
  });

  it.each([100, 80, 60])('fit %i columns', (columns) => {
    const wide = cell.fields!.map((field) => ({
      ...field,
      choice: 'delta/field:a_name_that_is_longer_than_most',
    }));
    for (const fields of [cell.fields!, wide]) {
      for (const line of fieldLines({ ...cell, fields }, 4, columns))
        expect([...line].length, line).toBeLessThanOrEqual(columns);
    }
  });

  it('are not there for other cells', () => {
    const { fields: _, ...other } = cell;
    expect(fieldLines(other, 4, 100)).toEqual([]);
    expect(fieldLines({ ...cell, symbol_count: 0 }, 4, 100)).toEqual([]);
  });
});
