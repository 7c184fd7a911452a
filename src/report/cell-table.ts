import { LINE_LETTERS } from '../account/bit-account.ts';
import type { CellRecord } from '../harness/run-record.ts';
import {
  countText,
  decimalsFor,
  padLeft,
  padRight,
  rateText,
  signedRateText,
  speedText,
  wrapText,
} from './figures.ts';
import { CUT, gapExtent, pieceFor, SPELLED_LINES, spellGap } from './spelled-gap.ts';
import { UNSTEADY } from './time-lines.ts';

export interface CellTableOptions {
  readonly columns: number;
  /** `byte`, `symbol` … as in "bits/byte". */
  readonly noun: string;
  /** Floor in bits per symbol, for each cell's own contexts. */
  floorOf(cell: CellRecord): number;
  /** The end whose flash and RAM are shown; absent: none. */
  readonly device?: 'encoder' | 'decoder';
  /** Ranks by cell id, where the cells were compared. */
  readonly rankOf?: ReadonlyMap<string, number>;
  /** Rates of each fold by cell id, where cells are means over folds. */
  readonly foldRates?: ReadonlyMap<string, readonly number[]>;
}

const LINE_WORDS: Readonly<Record<string, string>> = {
  opening: 'opening',
  structure: 'structure',
  learning: 'learning',
  model: 'both',
  above_floor: 'not split',
  rounding: 'rounding',
  tables: 'tables',
  index: 'index',
  framing: 'framing',
  ends: 'ends',
  check: 'check',
};

/** Follows the letters of a coder that is shown for scale only. */
const REFERENCE = ' reference';

interface Column {
  /** Moved to a table of its own first, highest first, where letters would have too little room; 0 stays always. */
  readonly spare: number;
  /** Tells the rows apart, so it stands in both tables. */
  readonly names?: boolean;
  readonly head: readonly [string, string];
  readonly right: boolean;
  text(cell: CellRecord): string;
}

function columnsFor(cells: readonly CellRecord[], options: CellTableOptions): Column[] {
  const decimals = decimalsFor(Math.min(...cells.map((c) => c.rate ?? 0)));
  const noun = options.noun.replace('code point', 'point');
  const always = (head: [string, string], right: boolean, text: Column['text']): Column => ({
    spare: 0,
    head,
    right,
    text,
  });
  const naming = (head: string, text: Column['text']): Column => ({
    ...always(['', head], false, text),
    names: true,
  });
  const columns: Column[] = [
    naming('candidate', (c) => c.candidate),
    naming('tables', (c) => (c.tables === 'none' ? '–' : c.tables)),
  ];
  if (new Set(cells.map((c) => c.reset)).size > 1) {
    columns.push(naming('reset', (c) => c.reset));
  }
  const ranked = cells.filter((c) => options.rankOf?.has(c.id));
  if (ranked.length > 1) {
    columns.push(always(['', 'rank'], true, (c) => String(options.rankOf!.get(c.id) ?? '–')));
  }
  columns.push(
    always(['bits/', noun], true, (c) => rateText(c.rate!, decimals)),
    always(['over', 'floor'], true, (c) => signedRateText(c.rate! - options.floorOf(c), decimals)),
  );
  const folded = cells.flatMap((c) => options.foldRates?.get(c.id) ?? []);
  if (folded.length > 0) {
    const folds = Math.max(...cells.map((c) => options.foldRates!.get(c.id)?.length ?? 0));
    columns.push({
      spare: 1,
      head: [`${folds} folds`, 'least–most'],
      right: true,
      text: (c) => rangeText(options.foldRates!.get(c.id), folds, decimals),
    });
  }
  if (cells.some((c) => c.units_per_message !== undefined)) {
    columns.push(
      always(['units/', 'message'], true, (c) => c.units_per_message?.mean.toFixed(1) ?? ''),
      {
        spare: 4,
        head: ['', 'messages'],
        right: true,
        text: (c) => (c.message_count === undefined ? '' : countText(c.message_count)),
      },
    );
  } else if (cells.some((c) => (c.message_count ?? 0) > 1)) {
    columns.push({
      spare: 4,
      head: ['bytes/', 'message'],
      right: true,
      text: (c) => (c.message_bytes?.mean ?? c.carried_bits! / 8 / c.message_count!).toFixed(1),
    });
  }
  if (cells.some((c) => c.loss !== undefined)) {
    columns.push(
      always(['% lost', 'msgs'], true, (c) =>
        c.loss === undefined ? '' : (c.loss.share * 100).toPrecision(2),
      ),
    );
  }
  if (cells.some((c) => c.billing !== undefined)) {
    columns.push({
      spare: 1,
      head: ['steps/', 'unit'],
      right: true,
      text: (c) => c.billing?.steps_per_unit.toPrecision(3) ?? '',
    });
  }
  const { device } = options;
  if (device !== undefined) {
    const bytesText = (bytes: number | undefined) => (bytes === undefined ? '–' : countText(bytes));
    columns.push(
      {
        spare: 1,
        head: [device, 'flash'],
        right: true,
        text: (c) => bytesText(c[device]?.flash_bytes),
      },
      { spare: 1, head: ['', 'RAM'], right: true, text: (c) => bytesText(c[device]?.ram_bytes) },
    );
  }
  if (cells.some((c) => c.encode !== undefined)) {
    for (const end of ['encode', 'decode'] as const) {
      const isMarked = cells.some((c) => c[end]?.unsteady);
      const markOf = (unsteady: boolean | undefined) =>
        isMarked ? (unsteady ? UNSTEADY : ' ') : '';
      columns.push({
        spare: end === 'encode' ? 2 : 3,
        head: [end === 'encode' ? 'speed' : '', end],
        right: true,
        text: (c) => (c[end] === undefined ? '' : speedText(c[end]) + markOf(c[end].unsteady)),
      });
    }
  }
  return columns;
}

/** The least and the most of a cell's folds; how many there are where some are missing. */
function rangeText(rates: readonly number[] | undefined, folds: number, decimals: number): string {
  if (rates === undefined) return '';
  const text = `${rateText(Math.min(...rates), decimals)}–${rateText(Math.max(...rates), decimals)}`;
  return rates.length === folds ? text : `${rates.length}: ${text}`;
}

/** Letters need at least this much room. */
const LEAST_ROOM = 18;

interface Layout {
  readonly columns: readonly Column[];
  readonly rows: readonly (readonly string[])[];
  readonly widths: readonly number[];
}

interface SpelledLayout extends Layout {
  /** Characters left for letters. */
  readonly room: number;
  /** Columns that letters left no room for. */
  readonly moved: readonly Column[];
}

function layOut(cells: readonly CellRecord[], columns: readonly Column[]): Layout {
  const rows = cells.map((cell) => columns.map((column) => column.text(cell)));
  const widths = columns.map((column, i) =>
    Math.max(...column.head.map((h) => h.length), ...rows.map((row) => [...row[i]].length)),
  );
  return { columns, rows, widths };
}

/** Texts and widths; columns that can be spared move out until the letters have room. */
function layOutSpelled(cells: readonly CellRecord[], options: CellTableOptions): SpelledLayout {
  const tail = cells.some((cell) => cell.reference) ? REFERENCE.length : 0;
  const all = columnsFor(cells, options);
  let columns = all;
  for (;;) {
    const layout = layOut(cells, columns);
    const used = layout.widths.reduce((sum, width) => sum + width + 2, 2);
    const room = options.columns - used - tail;
    const spare = Math.max(...columns.map((column) => column.spare));
    if (room >= LEAST_ROOM || spare === 0) {
      const moved = all.filter((column) => !columns.includes(column));
      return { ...layout, room: Math.max(8, room), moved };
    }
    columns = columns.filter((column) => column.spare !== spare);
  }
}

function writeRow({ columns, widths }: Layout, texts: readonly string[]): string {
  return texts
    .map((text, i) => (columns[i].right ? padLeft(text, widths[i]) : padRight(text, widths[i])))
    .join('  ');
}

function headRows(layout: Layout, last: string): string[] {
  const { columns } = layout;
  const lines: string[] = [];
  if (columns.some((c) => c.head[0] !== '')) {
    lines.push(
      `  ${writeRow(
        layout,
        columns.map((c) => c.head[0]),
      )}`.trimEnd(),
    );
  }
  lines.push(
    `  ${writeRow(
      layout,
      columns.map((c) => c.head[1]),
    )}${last}`.trimEnd(),
  );
  return lines;
}

/** A second table is worth its lines when it holds what was asked for, or the encoder's speed. */
const WORTH_A_TABLE = 2;

/** The columns that the spelled table had no room for, in a table of their own, as far as it has room. */
function movedTable(
  cells: readonly CellRecord[],
  columns: readonly Column[],
  moved: readonly Column[],
  width: number,
): string[] {
  if (!moved.some((column) => column.spare <= WORTH_A_TABLE)) return [];
  const layout = layOut(cells, [...columns.filter((column) => column.names === true), ...moved]);
  if (layout.widths.reduce((sum, own) => sum + own + 2, 0) > width) {
    const spare = Math.max(...moved.map((column) => column.spare));
    return movedTable(
      cells,
      columns,
      moved.filter((column) => column.spare !== spare),
      width,
    );
  }
  const rows = layout.rows.map((row) => `  ${writeRow(layout, row)}`.trimEnd());
  return ['', ...headRows(layout, ''), ...rows];
}

/** The verified cells as a table, best rate first, each with its gap over the floor spelled; then the failed ones. */
export function cellTable(cells: readonly CellRecord[], options: CellTableOptions): string[] {
  const good = cells
    .filter((c) => c.verified)
    .sort((a, b) => a.rate! - b.rate! || (a.id < b.id ? -1 : 1));
  const lines: string[] = [];
  if (good.length > 0) {
    const layout = layOutSpelled(good, options);
    const { columns, rows, room, moved } = layout;
    const scale = good.filter((cell) => !cell.reference && cell.coder !== 'fixed');
    const gaps = (scale.length > 0 ? scale : good).map((cell) => {
      const { above, below } = gapExtent(cell.account ?? {}, cell.symbol_count ?? 0);
      return above + below;
    });
    const spell = (piece: number): string[] =>
      good.map((cell) => spellGap(cell.account ?? {}, cell.symbol_count ?? 0, piece, room));
    const anyBelow = spell(pieceFor(gaps, room)).some((text) => text.startsWith('('));
    const piece = pieceFor(gaps, room - (anyBelow ? 3 : 0));
    const spelled = spell(piece);
    lines.push(...legend(spelled, piece, options, anyBelow), '');
    lines.push(...headRows(layout, `  ${room >= 23 ? 'over the floor, spelled' : 'spelled'}`));
    good.forEach((cell, i) => {
      lines.push(
        `  ${writeRow(layout, rows[i])}  ${spelled[i]}${cell.reference ? REFERENCE : ''}`.trimEnd(),
      );
    });
    lines.push(...movedTable(good, columns, moved, options.columns));
  }
  for (const cell of cells.filter((c) => !c.verified)) {
    lines.push(
      ...wrapText(
        `! ${cell.candidate} ${cell.tables}/${cell.reset}: no rate. ${cell.failure ?? ''}`,
        options.columns,
      ),
    );
  }
  return lines;
}

function legend(
  spelled: readonly string[],
  piece: number,
  options: CellTableOptions,
  anyBelow: boolean,
): string[] {
  const present = SPELLED_LINES.filter((line) =>
    spelled.some((text) => text.includes(LINE_LETTERS[line])),
  );
  const words = present.map((line) => `${LINE_LETTERS[line]} ${LINE_WORDS[line]}`);
  const text = `One letter = ${piece} bit/${options.noun} over the floor: ${words.join(', ')}.${
    anyBelow ? ' In parentheses: bits that lie below zero.' : ''
  }${spelled.some((text) => text.endsWith(CUT)) ? ` ${CUT} goes on.` : ''}`;
  return wrapText(text, options.columns, ' ');
}
