/** The contiguous blocks of a sequence over which the spread of code lengths is judged. */
export interface CountingBlocks {
  /** How many; at most 256. */
  readonly count: number;
  /** Shape [count]: the index one past each block's last symbol. Never falls; the last is the number of symbols. */
  readonly ends: Uint32Array;
}

/** `count` blocks of one length over `symbolCount` symbols; the last ones may be short or empty. */
export function countingBlocks(symbolCount: number, count: number): CountingBlocks {
  const length = Math.max(1, Math.ceil(symbolCount / count));
  const ends = new Uint32Array(count);
  for (let b = 0; b < count; b++) ends[b] = Math.min(symbolCount, (b + 1) * length);
  return { count, ends };
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
  let block = 0;
  for (let m = 0; m < ends.length; m++) {
    const to = ends[m] - order;
    for (let at = from; at < to; ) {
      while (blocks.ends[block] <= at) block++;
      const stop = Math.min(to, blocks.ends[block]);
      positions[block] += stop - at;
      at = stop;
    }
    from = ends[m];
  }
  return positions;
}
