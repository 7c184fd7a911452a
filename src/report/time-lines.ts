import type { CellRecord } from '../harness/run-record.ts';
import { countText, speedText, wrapText } from './figures.ts';
import { type Column, textTable } from './text-table.ts';

/** Follows a speed that was timed while the pacer itself ran unevenly. */
export const UNSTEADY = '~';

/** Narrower screens show the speeds in the table of cells alone. */
const LEAST_COLUMNS = 100;

/** Most cells whose times are told of; the others stand in the record. */
const MOST_CELLS = 6;

/** Samples of which the least and the largest hold their median between them in 95 % of cases. */
const ENOUGH_SAMPLES = 6;

type EndTimes = NonNullable<CellRecord['encode']>;
type PacedTime = NonNullable<CellRecord['table_build']>;

interface TimeColumn extends Column {
  /** Left out first, highest first, where the screen is narrow; 0 stays always. */
  readonly spare: number;
  text(cell: CellRecord): string;
}

function intervalText(times: EndTimes | undefined): string {
  if (times === undefined) return '';
  const [low, high] = [times.low, times.high].map((speed) =>
    speedText({ speed, low: speed, high: speed }).slice(1),
  );
  return `×${low} to ${high}${times.unsteady ? UNSTEADY : ''}`;
}

/** Two significant digits; of a time that may be none, only what it is below. */
function symbolsText(time: PacedTime | undefined): string {
  if (time === undefined) return '–';
  const { pacer_symbols: symbols, low, high } = time;
  const digits = (count: number) => {
    const text = countText(Math.abs(Number(count.toPrecision(2))));
    return count < 0 ? `−${text}` : text;
  };
  return low <= 0 && high >= 0 ? `<${digits(Math.max(1, high))}` : digits(symbols);
}

function bothEnds(cell: CellRecord, key: 'set_up' | 'per_message'): string {
  const [encode, decode] = [cell.encode?.[key], cell.decode?.[key]].map(symbolsText);
  return encode === '–' && decode === '–' ? '–' : `${encode} / ${decode}`;
}

function columnsFor(cells: readonly CellRecord[]): TimeColumn[] {
  const column = (
    title: string,
    right: boolean,
    spare: number,
    text: TimeColumn['text'],
  ): TimeColumn => ({ title, right, spare, text });
  return [
    column(' candidate', false, 0, (c) => ` ${c.candidate}`),
    column('tables', false, 0, (c) => (c.tables === 'none' ? '–' : c.tables)),
    ...(new Set(cells.map((c) => c.reset)).size > 1
      ? [column('reset', false, 0, (c) => c.reset)]
      : []),
    column('encode', true, 0, (c) => intervalText(c.encode)),
    column('decode', true, 0, (c) => intervalText(c.decode)),
    ...(cells.some((c) => c.encode?.per_message ?? c.decode?.per_message)
      ? [column('a message', true, 1, (c) => bothEnds(c, 'per_message'))]
      : []),
    column('set-up', true, 2, (c) => bothEnds(c, 'set_up')),
    ...(cells.some((c) => c.table_build)
      ? [column('training', true, 3, (c) => symbolsText(c.table_build))]
      : []),
  ];
}

function tableWithin(
  columns: readonly TimeColumn[],
  cells: readonly CellRecord[],
  width: number,
): string[] {
  const rows = cells.map((cell) => columns.map((column) => column.text(cell)));
  const lines = textTable(columns, rows);
  const spare = Math.max(...columns.map((column) => column.spare));
  if (spare === 0 || lines.every((line) => [...line].length <= width)) return lines;
  return tableWithin(
    columns.filter((column) => column.spare < spare),
    cells,
    width,
  );
}

/**
 * The intervals of speeds, and what is timed apart, for the best cells that are no references. Nothing where nothing was
 * timed, or the screen is narrow.
 * @param noun  of a symbol, as in "bits/byte"
 */
export function timeLines(cells: readonly CellRecord[], noun: string, columns: number): string[] {
  const all = cells
    .filter((cell) => cell.verified && !cell.reference && cell.encode !== undefined)
    .sort((a, b) => a.rate! - b.rate! || (a.id < b.id ? -1 : 1));
  const shown = all.slice(0, MOST_CELLS);
  if (shown.length === 0 || columns < LEAST_COLUMNS) return [];
  const table = tableWithin(columnsFor(shown), shown, columns);
  const [heads] = table;
  const apart = [
    heads.includes('a message') ? 'what a message costs beyond its symbols' : '',
    heads.includes('set-up') ? 'making an end ready (set-up)' : '',
    heads.includes('training') ? 'making the tables (training)' : '',
  ].filter((text) => text !== '');
  const rest = all.length - shown.length;
  const note = [
    '95 % intervals of the speeds.',
    apart.length === 0
      ? ''
      : `Apart, in ${noun}s that the pacer codes meanwhile, encoder / decoder: ${apart.join(', ')}.`,
    rest === 0 ? '' : `${rest === 1 ? 'The other cell' : `The other ${rest} cells`}: run record.`,
  ].filter((text) => text !== '');
  return [...wrapText(note.join(' '), columns - 1, ' '), '', ...table, ''];
}

/** What the speeds on a screen mean and how far they can be trusted; nothing where nothing was timed. */
export function speedNotes(cells: readonly CellRecord[]): string[] {
  const timed = cells.filter((cell) => cell.encode !== undefined);
  if (timed.length === 0) return [];
  const pacer = timed[0].timed?.pacer ?? 'deflate-huffman';
  const notes = [
    `Speed is the time of the pacer (${pacer}, the same symbols as one message) by that of the cell, turn by turn; above ×1 is faster.`,
  ];
  const isPart = timed.some((c) => (c.timed?.symbol_count ?? 0) < (c.symbol_count ?? 0));
  if (isPart) {
    notes.push(
      'Of long test parts the beginning is timed, less of it for slow cells: see timed in the run record.',
    );
  }
  const ends = timed.flatMap((cell) => [cell.encode, cell.decode]);
  const unsteady = ends.filter((end) => end?.unsteady).length;
  if (unsteady > 0) {
    notes.push(
      `${UNSTEADY} marks ${countText(unsteady)} of ${countText(ends.length)} speeds: the machine was busy with other things, in every round that was tried, so that the interval may miss. Time again when it is quiet.`,
    );
  }
  const fewest = Math.min(...ends.map((end) => end?.seconds.length ?? 0));
  if (fewest < ENOUGH_SAMPLES) {
    notes.push(
      `Intervals of speeds with fewer than ${ENOUGH_SAMPLES} samples are too narrow: the least number here is ${fewest}. timing.repeats of the plan sets it; the slowest cells get 3.`,
    );
  }
  return [notes.join(' ')];
}
