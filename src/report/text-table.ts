import { padLeft, padRight } from './figures.ts';

/** A column: its title, and whether its cells stand to the right. */
export interface Column {
  readonly title: string;
  readonly right: boolean;
}

/** Rows under their titles, two blanks between columns, one before the first. */
export function textTable(
  columns: readonly Column[],
  rows: readonly (readonly string[])[],
): string[] {
  const widths = columns.map(({ title }, c) =>
    Math.max([...title].length, ...rows.map((row) => [...row[c]].length)),
  );
  const write = (cells: readonly string[]): string =>
    ` ${cells
      .map((text, c) => (columns[c].right ? padLeft(text, widths[c]) : padRight(text, widths[c])))
      .join('  ')}`.trimEnd();
  return [write(columns.map((column) => column.title)), ...rows.map(write)];
}
