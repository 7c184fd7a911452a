/** What screens use beyond ASCII, and what stands for it on a terminal that may not show it. */
const REPLACEMENTS: readonly (readonly [RegExp, string])[] = [
  [/[–−]/g, '-'],
  [/≈/g, '~'],
  [/±/g, '+-'],
  [/×/g, 'x'],
  [/’/g, "'"],
];

/** `text` without the program's own marks beyond ASCII. Names that come from data keep theirs. */
export function asciiText(text: string): string {
  return REPLACEMENTS.reduce((result, [mark, plain]) => result.replace(mark, plain), text);
}
