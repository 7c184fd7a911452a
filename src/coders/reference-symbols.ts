import { CorruptStreamError } from '../errors/errors.ts';
import type { SymbolArray } from '../symbols/sequence.ts';

/** Bytes that a general-purpose coder sees of one symbol: 1 up to 256 symbols, 2 up to 65 536, 4 above. */
export function bytesPerSymbol(alphabetSize: number): 1 | 2 | 4 {
  if (alphabetSize <= 0x100) return 1;
  return alphabetSize <= 0x10000 ? 2 : 4;
}

/**
 * `symbols[from … to − 1]` as bytes, little endian on every machine. The result may share memory with `symbols`.
 * @param width  from {@link bytesPerSymbol}
 */
export function symbolsToBytes(
  symbols: SymbolArray,
  from: number,
  to: number,
  width: 1 | 2 | 4,
): Uint8Array {
  if (width === 1 && symbols instanceof Uint8Array) return symbols.subarray(from, to);
  const bytes = new Uint8Array((to - from) * width);
  let at = 0;
  for (let i = from; i < to; i++) {
    const symbol = symbols[i];
    for (let byte = 0; byte < width; byte++) bytes[at++] = (symbol >>> (8 * byte)) & 0xff;
  }
  return bytes;
}

/**
 * Writes the symbols that `bytes` stand for into `symbols` from index `at` on.
 * @throws CorruptStreamError when a symbol is outside the alphabet; `bytes.length` must be a multiple of `width`
 */
export function bytesToSymbols(
  bytes: Uint8Array,
  width: 1 | 2 | 4,
  alphabetSize: number,
  symbols: SymbolArray,
  at: number,
): void {
  const count = bytes.length / width;
  for (let i = 0; i < count; i++) {
    let symbol = 0;
    for (let byte = width - 1; byte >= 0; byte--) symbol = symbol * 256 + bytes[i * width + byte];
    if (symbol >= alphabetSize) {
      throw new CorruptStreamError('a decoded symbol is outside the alphabet', {
        symbolIndex: at + i,
        expected: `below ${alphabetSize}`,
        got: String(symbol),
      });
    }
    symbols[at + i] = symbol;
  }
}
