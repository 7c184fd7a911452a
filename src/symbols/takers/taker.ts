import type { AlphabetMap } from '../alphabet-map.ts';
import type { RecordShape } from '../record.ts';
import type { ByteSegments } from '../segments.ts';
import type { SymbolArray } from '../sequence.ts';

/** One file as a taker sees it. */
export interface TakerSource {
  /** Name for error messages. */
  readonly file: string;
  readonly bytes: Uint8Array;
  readonly segments: ByteSegments;
  readonly record?: RecordShape;
  /** Width of one quantisation step of a numeric column, above 0. */
  readonly step?: number;
}

/**
 * What was taken, before an alphabet that is found in data is known.
 * - `symbols`: ids of a natural alphabet, ready.
 * - `code-points`: Unicode scalar values.
 * - `quantised`: integers, value ÷ step rounded.
 * - `texts`: for each symbol an index into `texts`, which are distinct and in the order of their first appearance.
 */
export type TakenValues =
  | { readonly kind: 'symbols'; readonly alphabetSize: number; readonly symbols: SymbolArray }
  | { readonly kind: 'code-points'; readonly codePoints: Uint32Array }
  | { readonly kind: 'quantised'; readonly integers: Float64Array }
  | { readonly kind: 'texts'; readonly ids: Uint32Array; readonly texts: readonly string[] };

/** The values of one file; `messageEnds` has one entry for each segment, in symbols. */
export interface Taken {
  readonly values: TakenValues;
  readonly messageEnds: Uint32Array;
}

/** Turns source bytes into symbols. One file beside this one, and one line in the registry. */
export interface SymbolTaker {
  /** As a plan writes it: `bytes`, `csv:temperature` … */
  readonly text: string;
  /** Whether the alphabet is the taker's own (no map, 0 bits), or found in data unless the plan gives one. */
  readonly alphabet: 'natural' | 'map';
  /** Most symbols that one byte can give; bounds memory before anything is read. */
  readonly maxSymbolsPerByte: number;
  /** The name of the record field that symbols come from; the corpus must declare a record. */
  readonly field?: string;
  /** Each row of a table is one symbol: messages that are cut by bytes make no sense. */
  readonly takesRows: boolean;
  /**
   * Takes the symbols of every segment. May share memory with `source.bytes`.
   * @throws InputError when the bytes are not what the taker reads
   */
  take(source: TakerSource): Taken;
  /**
   * The bytes that {@link take} got, where symbols say everything about them; absent for takers that leave source bytes
   * out. Messages are joined without what lay between them.
   * @param map  the map behind the symbols, for a taker whose alphabet is found in data and was not given
   * @throws CorruptStreamError when no bytes give these symbols
   */
  untake?(symbols: SymbolArray, map?: AlphabetMap): Uint8Array;
}

/** A family of takers: one word of a plan, with its argument after a colon where it has one. */
export interface SymbolTakerFamily {
  /** `bytes`, or `csv:` with the colon where an argument follows. */
  readonly word: string;
  /** One line for help screens. */
  readonly summary: string;
  /** @param argument  the text after the colon, '' for families without one */
  create(argument: string): SymbolTaker;
}
