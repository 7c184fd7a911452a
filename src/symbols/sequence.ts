/** The narrowest typed array that holds ids 0 … alphabetSize − 1. */
export type SymbolArray = Uint8Array | Uint16Array | Uint32Array;

/**
 * Symbols with the bounds of their messages.
 *
 * Invariants: every symbol is below `alphabetSize`; `messageEnds` never falls; each entry is the index one past the
 * message's last symbol; equal neighbours are empty messages; `messageEnds.at(-1) === symbols.length` in a whole sequence
 * with at least one message.
 */
export interface SymbolSequence {
  readonly alphabetSize: number;
  readonly symbols: SymbolArray;
  readonly messageEnds: Uint32Array;
}

/**
 * A piece of a sequence as fed to an encoder or trainer. Symbols after the last end belong to a message that goes on in
 * the next chunk; `openSymbolCount` is then that message's whole symbol count, counted from its first symbol (which may
 * lie in an earlier chunk).
 */
export interface SymbolChunk extends SymbolSequence {
  readonly openSymbolCount?: number;
}

/** An array for `length` symbols of an alphabet of `alphabetSize`. */
export function newSymbolArray(alphabetSize: number, length: number): SymbolArray {
  if (alphabetSize <= 0x100) return new Uint8Array(length);
  if (alphabetSize <= 0x10000) return new Uint16Array(length);
  return new Uint32Array(length);
}

/** Number of messages of a whole sequence. */
export function messageCountOf(sequence: SymbolSequence): number {
  return sequence.messageEnds.length;
}

/** The messages `from` (inclusive) to `to` (exclusive) as a sequence of their own; symbols are shared, not copied. */
export function sliceMessages(sequence: SymbolSequence, from: number, to: number): SymbolSequence {
  const start = from === 0 ? 0 : sequence.messageEnds[from - 1];
  const end = to === 0 ? 0 : sequence.messageEnds[to - 1];
  const messageEnds = new Uint32Array(Math.max(0, to - from));
  for (let i = 0; i < messageEnds.length; i++)
    messageEnds[i] = sequence.messageEnds[from + i] - start;
  return {
    alphabetSize: sequence.alphabetSize,
    symbols: sequence.symbols.subarray(start, end),
    messageEnds,
  };
}

/** The whole of `symbols` as one message. */
export function oneMessage(symbols: SymbolArray, alphabetSize: number): SymbolSequence {
  return { alphabetSize, symbols, messageEnds: Uint32Array.of(symbols.length) };
}
