import { parse } from 'csv-parse/sync';
import { InputError } from '../errors/errors.ts';
import type { CellRecord, RunRecord } from '../harness/run-record.ts';
import { cellNamed } from './why.ts';

/** Columns of a file of the reader's own figures; `cell` and one other at least. */
const COLUMNS = ['cell', 'flash_bytes', 'ram_bytes', 'cycles_per_symbol'] as const;

/** What was measured of one cell on the target. */
export interface MeasuredCell {
  readonly flash_bytes?: number;
  readonly ram_bytes?: number;
  readonly cycles_per_symbol?: number;
}

function numberIn(text: string, file: string, line: number, key: string): number | undefined {
  if (text.trim() === '') return undefined;
  const value = Number(text);
  if (Number.isFinite(value) && value >= 0) return value;
  throw new InputError('this is no figure', {
    file,
    line,
    key,
    expected: 'a number of 0 or more, or nothing',
    got: text,
  });
}

/**
 * Reads figures measured on the reader's own target, by cell.
 * @param text  CSV with a head line; `cell` names a cell as {@link cellNamed} takes it
 * @throws InputError with the line of what cannot be read or names no cell
 */
export function readMeasured(
  text: string,
  file: string,
  record: RunRecord,
): Map<string, MeasuredCell> {
  let rows: string[][];
  try {
    rows = parse(text, { relax_column_count: true, skip_empty_lines: true, trim: true, bom: true });
  } catch (error) {
    throw new InputError('this is no CSV', { file, got: (error as Error).message });
  }
  const head = rows[0] ?? [];
  const unknown = head.find((name) => !COLUMNS.includes(name as (typeof COLUMNS)[number]));
  if (unknown !== undefined || !head.includes('cell') || head.length < 2) {
    throw new InputError('the head line does not name the columns', {
      file,
      line: 1,
      expected: `cell and some of ${COLUMNS.slice(1).join(', ')}`,
      got: head.join(','),
    });
  }
  const measured = new Map<string, MeasuredCell>();
  rows.slice(1).forEach((row, i) => {
    const line = i + 2;
    const of = (name: string): string => row[head.indexOf(name)] ?? '';
    let cell: CellRecord;
    try {
      cell = cellNamed(record, of('cell'));
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      throw new InputError(error.message, { ...error.where, file, line, key: 'cell' }, error);
    }
    if (measured.has(cell.id)) {
      throw new InputError(`${cell.id} stands twice`, { file, line, key: 'cell' });
    }
    const figures = Object.fromEntries(
      COLUMNS.slice(1).flatMap((key) => {
        const value = head.includes(key) ? numberIn(of(key), file, line, key) : undefined;
        return value === undefined ? [] : [[key, value]];
      }),
    );
    measured.set(cell.id, figures);
  });
  return measured;
}

/**
 * The record with measured figures in place of declared ones. They stand at both ends, since the file does not say which it speaks of; cycles take
 * the place of speeds in trade-offs.
 */
export function withMeasured(
  record: RunRecord,
  measured: ReadonlyMap<string, MeasuredCell>,
): RunRecord {
  const cells = record.cells.map((cell) => {
    const own = measured.get(cell.id);
    if (own === undefined) return cell;
    return { ...cell, encoder: { ...cell.encoder, ...own }, decoder: { ...cell.decoder, ...own } };
  });
  return { ...record, cells };
}
