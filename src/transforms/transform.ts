import type { SymbolChunk } from '../symbols/sequence.ts';

/** What a transform makes of an alphabet and of a message's length. */
export interface TransformShape {
  /** Alphabet of the symbols that come out. */
  readonly alphabetSize: number;
  /** A message of n symbols becomes one of n times this many. */
  readonly symbolsPerSymbol: number;
}

/**
 * One direction of a transform over one unit, fed chunk by chunk. Messages stay messages: as many come out as went in, in
 * the same order.
 */
export interface TransformPass {
  /**
   * What the chunk becomes; the input is left as it is. Any cut of a sequence into chunks gives the same symbols and ends, but a
   * step that needs whole messages keeps an open one back.
   */
  push(chunk: SymbolChunk): SymbolChunk;
  /** Ends the unit. Throws BugError when a message was kept back whose end never came. */
  finish(): void;
}

/**
 * A reversible step from symbols to symbols, in integers only.
 *
 * Promise: `inverse` undoes `forward` on every sequence of the alphabet, with the same `runsOn`. An inverse that meets
 * symbols which no `forward` gives throws CorruptStreamError.
 */
export interface Transform {
  /** As a chain writes it: `delta`, `lag24`. */
  readonly name: string;
  /** It gives nothing before it has seen a whole message. */
  readonly needsWholeMessage: boolean;
  /** Throws InputError where the step cannot take this alphabet, saying why. */
  shape(alphabetSize: number): TransformShape;
  /**
   * @param alphabetSize  m of the symbols before the step
   * @param runsOn  whether what came before counts on over message ends, or each message starts anew
   */
  forward(alphabetSize: number, runsOn: boolean): TransformPass;
  /** As {@link forward}; `alphabetSize` is still the one before the step. */
  inverse(alphabetSize: number, runsOn: boolean): TransformPass;
}
