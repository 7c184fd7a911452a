import { sortedSuffixes } from '../models/suffix-common.ts';
import { Repeats } from '../models/suffix-repeats.ts';
import { markovTwin } from '../models/suffix-twin.ts';
import type { SymbolArray, SymbolSequence } from '../symbols/sequence.ts';

/** Symbols of a piece at most: sorting takes about 45 bytes for each. */
const LARGEST_PIECE = 2 ** 21;
/** Longer sequences are judged by so many pieces, evenly spread, each matched with its own past only. */
const MOST_PIECES = 2;
/** Contiguous blocks over all pieces together. */
const BLOCKS = 64;
const TWIN_SEED = 1;

/** What there is to know of the matches of a sequence, by contiguous blocks. */
export interface MatchMeasurements {
  readonly own: MatchShares;
  /** Shape [blocks]: shares of a twin that has the data's order-k statistics and nothing else; unused for order −1. */
  readonly twin: Float64Array;
  /** Order of the twin; −1 for none. */
  readonly order: number;
  /** Σ of match lengths. */
  readonly matchSum: number;
  /** Components of the Lempel–Ziv history of 1976, summed over pieces. */
  readonly components: number;
  /** Σ over pieces of components times log2 of the piece's length. */
  readonly componentBits: number;
  /** Symbols looked at: all of them, or those of the pieces. */
  readonly symbolsUsed: number;
}

export interface MatchShares {
  /** Shape [blocks]: Σ Λ_i ÷ log2(i + 1), Λ_i being 1 + the longest match of position i wholly before i. */
  readonly shares: Float64Array;
  /** Shape [blocks]: positions with a past. */
  readonly positions: Float64Array;
}

/**
 * Match lengths of a sequence and of its twin; messages are not told apart.
 *
 * Sequences above {@link LARGEST_PIECE} are judged by two such pieces, their start and their end.
 * @param order  of the twin; −1 for none
 * Cost: linear time, about 0.3 to 1 µs a symbol looked at; about 45 bytes of memory for each symbol of a piece.
 */
export function measureMatches(
  sequence: SymbolSequence,
  order: number,
  largestPiece: number = LARGEST_PIECE,
): MatchMeasurements {
  const pieces = piecesOf(sequence.symbols, largestPiece);
  const blocksEach = Math.ceil(BLOCKS / Math.max(1, pieces.length));
  const blocks = blocksEach * pieces.length;
  const own = { shares: new Float64Array(blocks), positions: new Float64Array(blocks) };
  const twin = new Float64Array(blocks);
  let matchSum = 0;
  let components = 0;
  let componentBits = 0;
  let symbolsUsed = 0;
  for (const [p, piece] of pieces.entries()) {
    const measured = measurePiece(piece, order, blocksEach);
    own.shares.set(measured.own.shares, p * blocksEach);
    own.positions.set(measured.own.positions, p * blocksEach);
    twin.set(measured.twin, p * blocksEach);
    matchSum += measured.matchSum;
    components += measured.components;
    componentBits += measured.components * Math.log2(piece.length);
    symbolsUsed += piece.length;
  }
  return { own, twin, order, matchSum, components, componentBits, symbolsUsed };
}

function piecesOf(symbols: SymbolArray, largest: number): SymbolArray[] {
  const { length } = symbols;
  if (length === 0) return [];
  if (length <= largest) return [symbols];
  const size = Math.min(largest, Math.floor(length / MOST_PIECES));
  return Array.from({ length: MOST_PIECES }, (_, p) => {
    const from = Math.floor((p * (length - size)) / (MOST_PIECES - 1));
    return symbols.subarray(from, from + size);
  });
}

function measurePiece(symbols: SymbolArray, order: number, blocks: number) {
  const suffixes = sortedSuffixes(symbols);
  const { lengths, components } = lookBack(symbols, suffixes);
  let matchSum = 0;
  for (let i = 1; i < lengths.length; i++) matchSum += lengths[i];
  const own = matchShares(lengths, blocks);
  // The twin is drawn first, so that the data's own suffixes are let go of before its own are sorted.
  const twin =
    order < 0
      ? own.shares
      : matchShares(lookBack(markovTwin(symbols, suffixes, order, TWIN_SEED)).lengths, blocks)
          .shares;
  return { own, twin, matchSum, components };
}

function lookBack(symbols: SymbolArray, suffixes = sortedSuffixes(symbols)) {
  const repeats = new Repeats(suffixes);
  return { lengths: repeats.pastMatches(), components: repeats.componentCount() };
}

function matchShares(lengths: Uint32Array, blocks: number): MatchShares {
  const shares = new Float64Array(blocks);
  const positions = new Float64Array(blocks);
  for (let i = 1; i < lengths.length; i++) {
    const block = Math.floor((i * blocks) / lengths.length);
    shares[block] += (lengths[i] + 1) / Math.log2(i + 1);
    positions[block]++;
  }
  return { shares, positions };
}
