import type { CellRecord, RunRecord } from '../../src/harness/run-record.ts';
import { linesRecord } from '../report/sample-record.ts';

/** Records made up by hand, of which only what a gate looks at is set. */

export const hashOf = (i: number): string => i.toString(16).padStart(64, '0');

/** A verified cell of whole bytes; its account is all in `model` but what `more` says. */
export function cellOf(id: string, bytes: number, more: Partial<CellRecord> = {}): CellRecord {
  const [, corpus, candidate, tables, reset] = /^(.*?)\/(.*)@(.*)\/([^+]*)/.exec(id)!;
  const { encode: _, decode: __, timed: ___, ...sample } = linesRecord.cells[0];
  return {
    ...sample,
    id,
    corpus,
    candidate,
    coder: candidate,
    tables,
    reset,
    reference: false,
    verified: true,
    symbol_count: 1000,
    message_count: 10,
    carried_bits: bytes * 8,
    coded_bytes: bytes,
    rate: (bytes * 8) / 1000,
    account: { floor: 400, opening: 0, model: bytes * 8 - 400, tables: 0, ends: 0 },
    files: [{ sha256: hashOf(1), symbol_count: 1000, coded_bytes: bytes }],
    ...more,
  };
}

/** A run of these cells, all corpora of the same made-up data. */
export function recordOf(cells: readonly CellRecord[], more: Partial<RunRecord> = {}): RunRecord {
  const names = [...new Set(cells.map((cell) => cell.corpus))];
  return {
    ...linesRecord,
    corpora: names.map((name) => ({ ...linesRecord.corpora[0], name })),
    cells: [...cells],
    partial: false,
    ...more,
  };
}

/** Samples about one multiple of the pacer, steady to a thousandth. */
export function timesOf(multiple: number): NonNullable<CellRecord['encode']> {
  const seconds = Array.from({ length: 20 }, (_, i) => multiple * (1 + (i % 5) / 5000));
  return {
    seconds,
    pacer_seconds: seconds.map(() => 1),
    median: multiple,
    p95: multiple,
    speed: 1 / multiple,
    low: 0.999 / multiple,
    high: 1.001 / multiple,
    rounds: 1,
  };
}
