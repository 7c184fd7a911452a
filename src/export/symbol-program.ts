/** `encode_symbols(count)` of coders with one word a symbol, written by `put_word(symbol)`. */
const SYMBOLS_OUT = `
fn encode_symbols(count) {
  let i = 0;
  while (i < count && status == OK) {
    let symbol = symbols[i];
    if (symbol >= ALPHABET) {
      status = SYMBOL;
      return 0;
    }
    put_word(symbol);
    i = i + 1;
  }
}
`;

const SYMBOL_CHECK = / {4}if \(symbol >= ALPHABET\) \{[^}]*\}\n/;

/** Whether every value of a symbol's type is a symbol, so that there is nothing to check, and a compiler would say so. */
export function fillsItsType(alphabetSize: number): boolean {
  return alphabetSize === 2 ** 8 || alphabetSize === 2 ** 16;
}

/** Symbols checked against the alphabet and coded one by one. */
export function checkedSymbols(alphabetSize: number): string {
  return fillsItsType(alphabetSize) ? SYMBOLS_OUT.replace(SYMBOL_CHECK, '') : SYMBOLS_OUT;
}

/** `decode_symbols(count)` of coders with one word a symbol, read by `get_word()`. */
export const DECODED_SYMBOLS = `
fn decode_symbols(count) {
  let i = 0;
  while (i < count && status == OK) {
    symbols[i] = get_word();
    i = i + 1;
  }
}
`;
