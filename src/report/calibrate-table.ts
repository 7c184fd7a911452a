import { padLeft, padRight } from './figures.ts';

/** Columns from which on the wide tables fit. */
export const WIDE = 100;

export interface Column {
  readonly head: string;
  readonly left?: boolean;
}

/** Rows under a head, all cells padded to the width of their column. */
export function table(columns: readonly Column[], rows: readonly (readonly string[])[]): string[] {
  const widths = columns.map(({ head }, c) =>
    Math.max([...head].length, ...rows.map((row) => [...row[c]].length)),
  );
  const write = (cells: readonly string[]): string =>
    ` ${cells
      .map((text, c) =>
        columns[c].left === true ? padRight(text, widths[c]) : padLeft(text, widths[c]),
      )
      .join('  ')}`.trimEnd();
  return [write(columns.map((c) => c.head)), ...rows.map(write)];
}
