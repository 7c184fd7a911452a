import { newSymbolArray, type SymbolArray } from '../symbols/sequence.ts';

/**
 * Room for `more` symbols after the first `filled`, for decoders: the buffer at least doubles, so that the whole cost stays linear,
 * and never grows by more than is asked for beyond that.
 */
export function growSymbols(
  symbols: SymbolArray,
  alphabetSize: number,
  filled: number,
  more: number,
): SymbolArray {
  if (filled + more <= symbols.length) return symbols;
  const grown = newSymbolArray(alphabetSize, Math.max(filled + more, symbols.length * 2, 64));
  grown.set(symbols.subarray(0, filled));
  return grown;
}
