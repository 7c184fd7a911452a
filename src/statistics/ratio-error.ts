/**
 * Standard error of Σ sums ÷ Σ sizes, by the spread of contiguous blocks around that ratio (delta method): neighbours may
 * depend on one another within a block, blocks should hardly.
 *
 * @param sums   shape [B]
 * @param sizes  shape [B], ≥ 0; blocks of size 0 are left out
 * @returns undefined where fewer than two blocks have a size: there is no spread to judge by
 * Source: Cochran, "Sampling Techniques", 3rd ed. 1977, §6.4 (variance of a ratio estimate, from memory).
 */
export function ratioStandardError(sums: Float64Array, sizes: Float64Array): number | undefined {
  let sum = 0;
  let size = 0;
  let blocks = 0;
  for (let b = 0; b < sums.length; b++) {
    if (sizes[b] === 0) continue;
    sum += sums[b];
    size += sizes[b];
    blocks++;
  }
  if (blocks < 2) return undefined;
  const ratio = sum / size;
  let squares = 0;
  for (let b = 0; b < sums.length; b++) {
    if (sizes[b] !== 0) squares += (sums[b] - ratio * sizes[b]) ** 2;
  }
  return Math.sqrt((squares * blocks) / (blocks - 1)) / size;
}
