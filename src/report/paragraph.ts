import { countText, wrapText } from './figures.ts';

const NO_BREAK = '\u00a0';

/** A count whose groups stay on one line of a {@link paragraph}. */
export function countInText(count: number): string {
  return countText(count).replaceAll(' ', NO_BREAK);
}

/** A paragraph as lines that leave the last column free, each after one blank. */
export function paragraph(text: string, columns: number): string[] {
  return wrapText(text, columns - 1, ' ').map((line) => line.replaceAll(NO_BREAK, ' '));
}
