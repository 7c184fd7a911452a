import { newSymbolArray, type SymbolSequence } from '../symbols/sequence.ts';

/** Contiguous pieces of a sample. */
const PIECES = 64;

/**
 * At most `mostSymbols` symbols of a sequence, as 64 contiguous pieces spread evenly over it; the sequence itself where it
 * is no longer. A message ends with each piece, so that contexts within messages never join two pieces; contexts that run on
 * do so at 63 places.
 */
export function sampleEvenly(sequence: SymbolSequence, mostSymbols: number): SymbolSequence {
  const { alphabetSize, symbols, messageEnds } = sequence;
  if (symbols.length <= mostSymbols) return sequence;
  const pieceSymbols = Math.max(1, Math.floor(mostSymbols / PIECES));
  const pieces = Math.min(PIECES, mostSymbols);
  const sample = newSymbolArray(alphabetSize, pieces * pieceSymbols);
  const ends: number[] = [];
  let message = 0;
  for (let piece = 0; piece < pieces; piece++) {
    const from = Math.floor(((symbols.length - pieceSymbols) * piece) / (pieces - 1 || 1));
    const to = from + pieceSymbols;
    const at = piece * pieceSymbols;
    sample.set(symbols.subarray(from, to), at);
    while (message < messageEnds.length && messageEnds[message] <= from) message++;
    for (let m = message; m < messageEnds.length && messageEnds[m] < to; m++) {
      ends.push(at + messageEnds[m] - from);
    }
    ends.push(at + pieceSymbols);
  }
  return { alphabetSize, symbols: sample, messageEnds: Uint32Array.from(ends) };
}
