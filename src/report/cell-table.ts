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

export interface CellTableOptions {
  readonly columns: number;
  /** `byte`, `symbol` … as in "bits/byte". */
  readonly noun: string;
  /** Floor in bits per symbol, for each cell's own contexts. */
  floorOf(cell: CellRecord): number;
  /** The end whose flash and RAM are shown; absent: none. */
  readonly device?: 'encoder' | 'decoder';
  /** A mark of one character before the name, blank for most. */
  markOf?(cell: CellRecord): string;
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
  /** Left out first, highest first, where letters would have too little room; 0 stays always. */
  readonly spare: number;
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
  const columns: Column[] = [
    always(['', 'candidate'], false, (c) => c.candidate),
    always(['', 'tables'], false, (c) => (c.tables === 'none' ? '–' : c.tables)),
  ];
  if (new Set(cells.map((c) => c.reset)).size > 1) {
    columns.push(always(['', 'reset'], false, (c) => c.reset));
  }
  columns.push(
    always(['bits/', noun], true, (c) => rateText(c.rate!, decimals)),
    always(['over', 'floor'], true, (c) => signedRateText(c.rate! - options.floorOf(c), decimals)),
  );
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
      text: (c) => c.message_bytes?.mean.toFixed(1) ?? '',
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
      columns.push({
        spare: end === 'encode' ? 2 : 3,
        head: [end === 'encode' ? 'speed' : '', end],
        right: true,
        text: (c) => (c[end] === undefined ? '' : speedText(c[end].speed)),
      });
    }
  }
  return columns;
}

/** Letters need at least this much room. */
const LEAST_ROOM = 18;

interface Layout {
  readonly columns: readonly Column[];
  readonly rows: readonly (readonly string[])[];
  readonly widths: readonly number[];
  /** Characters left for letters. */
  readonly room: number;
}

/** Texts and widths; columns that can be spared go until the letters have room. */
function layOut(cells: readonly CellRecord[], options: CellTableOptions): Layout {
  const tail = cells.some((cell) => cell.reference) ? REFERENCE.length : 0;
  let columns = columnsFor(cells, options);
  for (;;) {
    const rows = cells.map((cell) => columns.map((column) => column.text(cell)));
    const widths = columns.map((column, i) =>
      Math.max(...column.head.map((h) => h.length), ...rows.map((row) => [...row[i]].length)),
    );
    const room = options.columns - widths.reduce((sum, width) => sum + width + 2, 2) - tail;
    const spare = Math.max(...columns.map((column) => column.spare));
    if (room >= LEAST_ROOM || spare === 0) {
      return { columns, rows, widths, room: Math.max(8, room) };
    }
    columns = columns.filter((column) => column.spare !== spare);
  }
}

/** The verified cells as a table, best rate first, each with its gap over the floor spelled; then the failed ones. */
export function cellTable(cells: readonly CellRecord[], options: CellTableOptions): string[] {
  const good = cells
    .filter((c) => c.verified)
    .sort((a, b) => a.rate! - b.rate! || (a.id < b.id ? -1 : 1));
  const lines: string[] = [];
  if (good.length > 0) {
    const { columns, rows, widths, room } = layOut(good, options);
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
    const write = (texts: readonly string[]): string =>
      texts
        .map((text, i) => (columns[i].right ? padLeft(text, widths[i]) : padRight(text, widths[i])))
        .join('  ');
    lines.push(...legend(spelled, piece, options, anyBelow));
    lines.push('');
    if (columns.some((c) => c.head[0] !== ''))
      lines.push(`  ${write(columns.map((c) => c.head[0]))}`.trimEnd());
    lines.push(
      `  ${write(columns.map((c) => c.head[1]))}  ${room >= 23 ? 'over the floor, spelled' : 'spelled'}`.trimEnd(),
    );
    good.forEach((cell, i) => {
      const mark = options.markOf?.(cell) ?? ' ';
      lines.push(
        `${mark} ${write(rows[i])}  ${spelled[i]}${cell.reference ? REFERENCE : ''}`.trimEnd(),
      );
    });
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
