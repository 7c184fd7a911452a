import { describe, expect, it } from 'vitest';
import type { CellRecord } from '../../src/harness/run-record.ts';
import { messageLines } from '../../src/report/message-lines.ts';
import { linesRecord } from './sample-record.ts';

const cell = (candidate: string, rate: number, more: Partial<CellRecord> = {}): CellRecord => ({
  ...linesRecord.cells[0],
  id: `events/${candidate}@shipped/message`,
  candidate,
  rate,
  message_bytes: { mean: 20.5, p50: 20, p95: 30, p99: 41, max: 1042 },
  messages: {
    grow_share: 0.0004,
    largest_index: 3,
    worst: { index: 1234, bytes: 1042, fixed_width_bytes: 900 },
  },
  ...more,
});

describe('message lines', () => {
  it('are of the best cells, with whole bytes where all are whole', () => {
    const lines = messageLines([cell('b', 2), cell('a', 1)], 100);
    const at = lines.findIndex((line) => line.includes('candidate'));
    expect(lines[at]).toMatch(/candidate +tables +p50 +p95 +p99 +max +% grow +worst$/);
    expect(lines[at + 1]).toMatch(
      /^ {2}a +shipped +20 +30 +41 +1.042 +<0\.1 +no\. 1234: 900 → 1.042$/,
    );
    expect(lines[at + 2]).toMatch(/^ {2}b /);
    expect(lines.join('\n')).not.toContain('run record');
    const bits = cell('c', 3, { message_bytes: { mean: 1, p50: 1.5, p95: 2, p99: 2, max: 2 } });
    expect(messageLines([bits], 100).join('\n')).toMatch(/c +shipped +1\.5 +2\.0 +2\.0 +2\.0/);
  });

  it('say how many cells are not shown', () => {
    const cells = Array.from({ length: 8 }, (_, i) => cell(`c${i}`, i));
    const text = messageLines(cells, 100).join('\n');
    expect(text).toContain('c5');
    expect(text).not.toContain('c6');
    expect(text).toContain('The other 2 cells: run record.');
    expect(messageLines(cells.slice(0, 7), 100).join('\n')).toContain(
      'The other cell: run record.',
    );
  });

  it('are left out for one message, for references, and where filled messages do not grow', () => {
    const { messages: _, ...whole } = cell('a', 1);
    expect(messageLines([whole], 100)).toEqual([]);
    expect(messageLines([cell('deflate', 1, { reference: true })], 100)).toEqual([]);
    expect(messageLines([cell('a', 1, { verified: false })], 100)).toEqual([]);
    const filled = cell('a', 1, { unit_count: 50 });
    expect(messageLines([filled], 100)).not.toEqual([]);
    const shrinks = { ...filled, messages: { ...filled.messages!, grow_share: 0 } };
    expect(messageLines([shrinks], 100)).toEqual([]);
  });

  it.each([100, 80])('fit into %i columns', (columns) => {
    const cells = [
      cell('arith:order=0,position=24', 1, { tables: 'primed', reset: 'message' }),
      cell('arith:order=1', 2, { tables: 'learned', reset: 'never' }),
    ];
    const lines = messageLines(cells, columns);
    for (const line of lines) expect([...line].length, line).toBeLessThanOrEqual(columns);
    expect(lines.join('\n')).toContain('% grow');
  });
});
