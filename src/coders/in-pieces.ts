import type { SymbolArray, SymbolChunk } from '../symbols/sequence.ts';
import type { DecodeLimits, Setup } from './contract.ts';

/** Coded bytes that lie outside memory. */
export interface CodedSource {
  readonly byteLength: number;
  /**
   * Fills `into` from byte `at` on, as far as there are bytes.
   * @returns bytes read: less than asked for only at the end
   */
  read(into: Uint8Array, at: number): number;
}

/** What a decoder in pieces is given of one unit; the optional parts only under the lengths rule that grants them. */
export interface PiecesInput {
  readonly source: CodedSource;
  readonly messageCount: number;
  /** Only under `link`. */
  readonly messageEndsBits?: Float64Array;
  /** Only under `known`. */
  readonly symbolCounts?: Uint32Array;
  /** Bytes of the source in memory at once, at least 4096; a table that is sent must lie in half of them. Absent: 2^20. */
  readonly windowBytes?: number;
}

/** Takes decoded symbols in their order. */
export interface DecodedTaker {
  /** `symbols[from … to − 1]` come next; the array is used again after the call. */
  take(symbols: SymbolArray, from: number, to: number): void;
  /** A message is complete. */
  end(): void;
}

/** Prices a unit chunk by chunk. */
export interface Pricer {
  push(chunk: SymbolChunk): void;
  finish(): PiecesPrice;
}

export interface PiecesPrice {
  readonly idealBits: number;
  readonly messageIdealBits: Float64Array;
  /** `fit` is over all distributions of this order; absent where the class has no best member. */
  readonly fitOrder?: number;
}

/**
 * The parts of a coder that work on data which memory cannot hold; its encoder then takes `Setup.sink`. They give what
 * the coder's own decoder and price give of the same unit.
 */
export interface InPieces {
  /**
   * Decodes a unit. Yields between blocks of symbols, so that the caller can do something else; returns the bits read,
   * padding included.
   * @throws CorruptStreamError, LimitError – and nothing else, whatever the bytes
   */
  decode(
    input: PiecesInput,
    setup: Setup,
    limits: DecodeLimits,
    taker: DecodedTaker,
  ): Generator<undefined, number, undefined>;
  /** `sent` with reset `message` prices each message by itself and holds one at a time. */
  pricer(setup: Setup): Pricer;
}
