/** The contiguous blocks of a sequence over which the spread of code lengths is judged. */
export interface CountingBlocks {
  /** How many; at most 256. */
  readonly count: number;
  /** Symbols in each but the last. */
  readonly length: number;
}

/** `count` blocks over `symbolCount` symbols; the last ones may be short or empty. */
export function countingBlocks(symbolCount: number, count: number): CountingBlocks {
  return { count, length: Math.max(1, Math.ceil(symbolCount / count)) };
}

/**
 * Positions of order k in each block. A position belongs to the block in which its context begins, so that every order is
 * cut at the same places.
 * @param ends  where contexts begin anew
 */
export function positionsByBlock(
  ends: Uint32Array,
  order: number,
  blocks: CountingBlocks,
): Float64Array {
  const positions = new Float64Array(blocks.count);
  let from = 0;
  for (let m = 0; m < ends.length; m++) {
    const to = ends[m] - order;
    for (let at = from; at < to; ) {
      const block = Math.floor(at / blocks.length);
      const stop = Math.min(to, (block + 1) * blocks.length);
      positions[block] += stop - at;
      at = stop;
    }
    from = ends[m];
  }
  return positions;
}
