import { isUtf8 } from 'node:buffer';
import { CsvError, type Options, parse } from 'csv-parse/sync';
import { InputError } from '../../errors/errors.ts';
import { nearestWord } from '../../errors/nearest.ts';
import { MAX_RANGE_VALUE } from '../alphabet-map.ts';
import { checkUtf8 } from '../utf8.ts';
import { csvWindows } from './csv-windows.ts';
import type { SymbolTaker, SymbolTakerFamily, Taken, TakerSource } from './taker.ts';

/** Bytes of a table that are held as cells at once. */
const WINDOW_BYTES = 2 ** 20;

/** Runs the parser and puts its refusal into our words. */
function parseRows(
  bytes: Uint8Array,
  file: string,
  rowsBefore: number,
  options: Options,
): string[][] {
  try {
    return parse(bytes, {
      record_delimiter: ['\r\n', '\n', '\r'],
      relax_column_count: true,
      ...options,
    });
  } catch (error) {
    if (!(error instanceof CsvError)) throw error;
    const records = Reflect.get(error, 'records');
    return refuseTable(
      file,
      rowsBefore + (typeof records === 'number' ? records : 0),
      'quotes around whole cells, and doubled inside them (RFC 4180)',
      error.message,
    );
  }
}

/** @param row  counted from 0, the header */
function refuseTable(file: string, row: number, expected: string, got: string): never {
  throw new InputError(
    `${row === 0 ? 'the header' : `row ${row}`} of ${file} is not well-formed as comma-separated values`,
    { file, expected, got },
  );
}

function columnIndex(header: readonly string[], column: string, file: string): number {
  const index = header.indexOf(column);
  if (index >= 0 && header.indexOf(column, index + 1) < 0) return index;
  const near = nearestWord(column, header);
  const other =
    header.length !== 1 ? undefined : [';', '\t', '|'].find((mark) => header[0].includes(mark));
  const advice =
    index >= 0
      ? 'Rename one of them; a column is chosen by its name.'
      : near !== undefined
        ? `Did you mean csv:${near}?`
        : other === undefined
          ? 'The first row of the file must hold the names of the columns.'
          : `The cells seem to be separated by ${JSON.stringify(other)}; only commas are read.`;
  throw new InputError(
    index >= 0
      ? `${file} has two columns named ${JSON.stringify(column)}`
      : `${file} has no column named ${JSON.stringify(column)}`,
    { file, expected: `one of the columns ${header.join(', ')}`, got: column, advice },
  );
}

/** Calls `use` for the column's cell of every row after the header, with the row's number from 1. */
function forEachCell(
  source: TakerSource,
  column: string,
  use: (cell: string, row: number) => void,
): void {
  const { bytes, file } = source;
  if (!isUtf8(bytes)) checkUtf8(bytes, 0, bytes.length, file);
  const header = parseRows(bytes, file, 0, { to: 1, bom: true })[0] ?? [];
  const index = columnIndex(header, column, file);
  const width = header.length;
  /** Rows so far, the header included, which is also the number of the next row. */
  let row = 0;
  for (const window of csvWindows(bytes, WINDOW_BYTES)) {
    // In a table of one column an empty line is a row with an empty cell.
    const options = { bom: row === 0, skip_empty_lines: width > 1 };
    for (const record of parseRows(window, file, row, options)) {
      if (record.length !== width)
        refuseTable(file, row, `${width} cells, as in the header`, `${record.length}`);
      if (row > 0) use(record[index], row);
      row++;
    }
  }
}

function takeTexts(source: TakerSource, column: string): Taken {
  const ids: number[] = [];
  const texts: string[] = [];
  const idOf = new Map<string, number>();
  forEachCell(source, column, (cell) => {
    let id = idOf.get(cell);
    if (id === undefined) {
      id = texts.length;
      texts.push(cell);
      idOf.set(cell, id);
    }
    ids.push(id);
  });
  return {
    values: { kind: 'texts', ids: Uint32Array.from(ids), texts },
    messageEnds: Uint32Array.of(ids.length),
  };
}

function takeNumbers(source: TakerSource, column: string, step: number): Taken {
  const integers: number[] = [];
  forEachCell(source, column, (cell, row) => {
    const text = cell.trim();
    const value = /^[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?$/.test(text) ? Number(text) : Number.NaN;
    const integer = Math.round(value / step);
    if (!(Math.abs(integer) <= MAX_RANGE_VALUE)) {
      throw new InputError(
        `row ${row} of the column ${column} of ${source.file} is no usable number`,
        {
          file: source.file,
          expected: `a decimal number of at most 2^51 steps of ${step}`,
          got: JSON.stringify(cell),
          advice:
            'Leave step out of the plan to code the distinct texts of the column as they are.',
        },
      );
    }
    // Adding 0 turns −0 into 0.
    integers.push(integer + 0);
  });
  return {
    values: { kind: 'quantised', integers: Float64Array.from(integers) },
    messageEnds: Uint32Array.of(integers.length),
  };
}

/**
 * One column of a table of comma-separated values with a header row; each row is one symbol. With a step: the integers
 * nearest to value ÷ step (halves go up), the alphabet being the range they span. Without: the distinct texts.
 */
export const csvColumnFamily: SymbolTakerFamily = {
  word: 'csv:',
  summary: 'one column of a comma-separated table with a header row: csv:COLUMN',
  create: (column): SymbolTaker => ({
    text: `csv:${column}`,
    alphabet: 'map',
    maxSymbolsPerByte: 1,
    takesRows: true,
    take: (source) =>
      source.step === undefined
        ? takeTexts(source, column)
        : takeNumbers(source, column, source.step),
  }),
};
