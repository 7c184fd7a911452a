import { describe, expect, it } from 'vitest';
import type { CellRecord } from '../../src/harness/run-record.ts';
import { tableSetLines } from '../../src/report/table-set-lines.ts';

/** Made up by hand. */
const cell = (coder: string, params: CellRecord['params'], rate: number): CellRecord => ({
  id: `c/${coder}`,
  corpus: 'c',
  candidate: `${coder}:${Object.entries(params)
    .map(([key, value]) => `${key}=${value}`)
    .join(',')}`,
  coder,
  params,
  tables: 'shipped',
  reset: 'message',
  reference: false,
  decodes_alone: true,
  messages_as: 'lines',
  verified: true,
  rate,
});

describe('cells that differ in the tables of their set', () => {
  it('stand in one sentence by rising number, which says where more do not pay', () => {
    const cells = [
      cell('arith', { order: 1, tables_in_set: 8 }, 2.64),
      cell('arith', { order: 1, tables_in_set: 1 }, 3.08),
      cell('huffman', { tables_in_set: 2, stored: 'on' }, 4.5),
      cell('arith', { order: 1, tables_in_set: 4 }, 2.6),
      cell('huffman', { tables_in_set: 3, stored: 'on' }, 4.25),
      cell('arith', { order: 2, tables_in_set: 4 }, 1.5),
      cell('arith', { order: 1 }, 3.08),
    ];
    expect(tableSetLines(cells, 'byte')).toEqual([
      'arith:order=1 by tables in set: 1: 3.08, 4: 2.60, 8: 2.64 bits/byte; more than 4 do not pay.',
      'huffman:stored=on by tables in set: 2: 4.50, 3: 4.25 bits/byte.',
    ]);
  });

  it('say what flash the tables take, at the end that is asked for, or at both', () => {
    const at = (count: number, rate: number, encoder: number, decoder?: number): CellRecord => ({
      ...cell('huffman', { tables_in_set: count }, rate),
      encoder: { flash_bytes: encoder },
      ...(decoder === undefined ? {} : { decoder: { flash_bytes: decoder } }),
    });
    const cells = [at(1, 2, 768, 900), at(2, 1.5, 1536, 1800)];
    expect(tableSetLines(cells, 'byte', 'decoder')).toEqual([
      'huffman by tables in set: 1: 2.00, 2: 1.50 bits/byte; flash 900, 1 800 bytes.',
    ]);
    expect(tableSetLines(cells, 'byte')).toEqual([
      'huffman by tables in set: 1: 2.00, 2: 1.50 bits/byte; flash 768, 1 536 bytes at the encoder, 900, 1 800 at the decoder.',
    ]);
    expect(tableSetLines([at(1, 2, 5, 5), at(2, 3, 10, 10)], 'byte')).toEqual([
      'huffman by tables in set: 1: 2.00, 2: 3.00 bits/byte; flash 5, 10 bytes; more than 1 do not pay.',
    ]);
    expect(tableSetLines([at(1, 2, 5), at(2, 1, 10)], 'byte', 'decoder')).toEqual([
      'huffman by tables in set: 1: 2.00, 2: 1.00 bits/byte.',
    ]);
  });

  it('have no sentence where one of them stands alone or failed', () => {
    const { rate: _, ...failed } = cell('rice', { tables_in_set: 2 }, 1);
    const cells = [cell('rice', { tables_in_set: 1 }, 1), { ...failed, verified: false }];
    expect(tableSetLines(cells, 'byte')).toEqual([]);
  });

  it('are named by the coder alone where it has no other key', () => {
    const cells = [1, 2].map((count) => cell('huffman', { tables_in_set: count }, 1));
    expect(tableSetLines(cells, 'symbol')).toEqual([
      'huffman by tables in set: 1: 1.00, 2: 1.00 bits/symbol; more than 1 do not pay.',
    ]);
  });
});
