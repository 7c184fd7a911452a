import type { CellRecord } from '../harness/run-record.ts';
import { countText, wrapText } from './figures.ts';
import { type Column, textTable } from './text-table.ts';

/** Most cells whose messages are told of; the others stand in the record. */
const MOST_CELLS = 6;

interface MessageColumn extends Column {
  /** Left out first, highest first, where the screen is narrow; 0 stays always. */
  readonly spare: number;
  text(cell: CellRecord): string;
}

function shareText(share: number): string {
  const percent = share * 100;
  if (percent > 0 && percent < 0.05) return '<0.1';
  return percent.toFixed(1);
}

/** Bytes, with a tenth where any of the figures has a fraction. */
function bytesWriter(cells: readonly CellRecord[]): (bytes: number) => string {
  const whole = cells.every(({ message_bytes: b, messages }) =>
    [b!.p50, b!.p95, b!.p99, b!.max, messages!.worst.bytes].every(Number.isInteger),
  );
  return (bytes) => (whole ? countText(bytes) : bytes.toFixed(1));
}

/** Whether the messages of a cell tell more than their mean: not where all are filled, and none grows. */
function isWorthALine({ messages, unit_count }: CellRecord): boolean {
  return messages !== undefined && (unit_count === undefined || messages.grow_share > 0);
}

function columnsFor(cells: readonly CellRecord[]): MessageColumn[] {
  const bytesText = bytesWriter(cells);
  const left = (title: string, text: MessageColumn['text']): MessageColumn => ({
    title,
    right: false,
    spare: 0,
    text,
  });
  const right = (title: string, spare: number, text: MessageColumn['text']): MessageColumn => ({
    title,
    right: true,
    spare,
    text,
  });
  return [
    left(' candidate', (c) => ` ${c.candidate}`),
    left('tables', (c) => (c.tables === 'none' ? '–' : c.tables)),
    ...(new Set(cells.map((c) => c.reset)).size > 1 ? [left('reset', (c) => c.reset)] : []),
    right('p50', 2, (c) => bytesText(c.message_bytes!.p50)),
    right('p95', 3, (c) => bytesText(c.message_bytes!.p95)),
    right('p99', 0, (c) => bytesText(c.message_bytes!.p99)),
    right('max', 0, (c) => bytesText(c.message_bytes!.max)),
    right('% grow', 0, (c) => shareText(c.messages!.grow_share)),
    right('worst', 1, ({ messages }) => {
      const { index, bytes, fixed_width_bytes } = messages!.worst;
      return `no. ${index}: ${bytesText(fixed_width_bytes)} → ${bytesText(bytes)}`;
    }),
  ];
}

/** The table of as many columns as the screen has room for. */
function tableWithin(
  columns: readonly MessageColumn[],
  cells: readonly CellRecord[],
  width: number,
): string[] {
  const lines = textTable(
    columns,
    cells.map((cell) => columns.map((column) => column.text(cell))),
  );
  const spare = Math.max(...columns.map((column) => column.spare));
  if (spare === 0 || lines.every((line) => [...line].length <= width)) return lines;
  return tableWithin(
    columns.filter((column) => column.spare < spare),
    cells,
    width,
  );
}

/**
 * How the coded sizes of messages spread, for the best cells that are no references: quantiles, the share that grow, and
 * which one is served worst, by index. Nothing where a corpus is one message.
 */
export function messageLines(cells: readonly CellRecord[], columns: number): string[] {
  const all = cells
    .filter((cell) => cell.verified && !cell.reference && cell.messages !== undefined)
    .sort((a, b) => a.rate! - b.rate! || (a.id < b.id ? -1 : 1));
  const shown = all.slice(0, MOST_CELLS);
  if (!shown.some(isWorthALine)) return [];
  const rest = all.length - shown.length;
  const table = tableWithin(columnsFor(shown), shown, columns);
  const worst = table[0].includes('worst')
    ? ' Worst: the one that grows most, or shrinks least, from its bytes at a fixed width; numbers start at 0, in the part that is coded.'
    : '';
  const others =
    rest === 0 ? '' : ` ${rest === 1 ? 'The other cell' : `The other ${rest} cells`}: run record.`;
  const note = `Carried bytes of a message. % grow: messages that take more than at a fixed width.${worst}${others}`;
  return [...wrapText(note, columns - 1, ' '), '', ...table, ''];
}
