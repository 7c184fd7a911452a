import type { Coder, Setup } from '../coders/contract.ts';
import type { ContextScope } from '../models/context-counts.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';

/** A contiguous part of a sequence, cut into blocks that a model codes as messages. */
export interface BlockedPart {
  readonly sequence: SymbolSequence;
  /** For each message of `sequence` the block it lies in. */
  readonly blockOf: Uint32Array;
  /** Symbols of each block; shape [blocks]. */
  readonly blockSymbols: Float64Array;
}

/**
 * The symbols `from … to − 1` in `blocks` blocks of nearly equal size. A message ends with each block, so that a block's
 * first symbols have start contexts at every order alike; under contexts `message`, where messages end as well, and
 * else at `breaks`.
 */
export function cutIntoBlocks(
  source: SymbolSequence,
  from: number,
  to: number,
  blocks: number,
  contexts: ContextScope,
  breaks: Uint32Array = new Uint32Array(0),
): BlockedPart {
  const pieces = contexts === 'message' ? source.messageEnds : breaks;
  const ends: number[] = [];
  const blockOf: number[] = [];
  const blockSymbols = new Float64Array(blocks);
  let piece = firstEndAbove(pieces, from);
  let at = from;
  for (let block = 0; block < blocks; block++) {
    const stop = from + Math.floor(((block + 1) * (to - from)) / blocks);
    while (at < stop) {
      while (piece < pieces.length && pieces[piece] <= at) piece++;
      const end = piece < pieces.length ? Math.min(stop, pieces[piece]) : stop;
      ends.push(end - from);
      blockOf.push(block);
      blockSymbols[block] += end - at;
      at = end;
    }
  }
  return {
    sequence: {
      alphabetSize: source.alphabetSize,
      symbols: source.symbols.subarray(from, to),
      messageEnds: Uint32Array.from(ends),
    },
    blockOf: Uint32Array.from(blockOf),
    blockSymbols,
  };
}

/** Index of the first end above `position`, by halving. */
function firstEndAbove(ends: Uint32Array, position: number): number {
  let low = 0;
  let high = ends.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (ends[middle] <= position) low = middle + 1;
    else high = middle;
  }
  return low;
}

/**
 * Ideal code length of each block of `part`, in bits, by a model trained on `train` and static from then on.
 * @param coder  with a trainer and a price, under policy `shipped`
 */
export function heldOutBits(coder: Coder, train: SymbolSequence, part: BlockedPart): Float64Array {
  const setup: Setup = {
    policy: 'shipped',
    alphabetSize: train.alphabetSize,
    reset: 'message',
    lengths: 'known',
    align: 1,
  };
  coder.check?.(setup);
  const trainer = coder.trainer!(setup);
  trainer.push(train);
  const price = coder.price!(part.sequence, { ...setup, tables: trainer.finish() });
  const bits = new Float64Array(part.blockSymbols.length);
  for (let m = 0; m < price.messageIdealBits.length; m++) {
    bits[part.blockOf[m]] += price.messageIdealBits[m];
  }
  return bits;
}

/** Σ values. */
export function totalOf(values: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += values[i];
  return sum;
}
