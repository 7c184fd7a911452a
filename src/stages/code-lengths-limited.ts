/**
 * Low part of a weight held in two 32-bit integers: a package of words up to 32 bits can weigh 32 ·
 * 2^53.
 */
const LOW_BITS = 30;
const LOW_SIZE = 2 ** LOW_BITS;

/**
 * How many words of each length an optimal code of at most `maxBits` bits has, by package-merge.
 *
 * A word of length l buys one coin at each of the levels 1 … l. From the deepest level up,
 * neighbours in the sorted list of a level are packed into one coin of the level above. The 2k − 2
 * lightest coins of level 1 are an optimal purchase; only the number of single coins among those
 * bought at each level is needed, and one bit a coin remembers which are single.
 *
 * @param weights  sorted, lightest first; positive integers with a sum below 2^53; exact
 * @param count    k, 2 … 2^maxBits
 * @returns index l: number of words of l bits, l = 1 … maxBits
 * Cost: O(k · maxBits) time, 32 k + k · maxBits / 4 bytes.
 * Source: L. L. Larmore, D. S. Hirschberg, "A fast algorithm for optimal length-limited Huffman
 * codes", J. ACM 37(3), 1990.
 */
export function limitedLengthCounts(
  weights: Float64Array,
  count: number,
  maxBits: number,
): Float64Array {
  const size = 2 * count;
  const rowBytes = Math.ceil(size / 8);
  const single = new Uint8Array(rowBytes * maxBits);
  const leafHigh = new Int32Array(count);
  const leafLow = new Int32Array(count);
  for (let i = 0; i < count; i++) {
    leafHigh[i] = Math.floor(weights[i] / LOW_SIZE);
    leafLow[i] = weights[i] % LOW_SIZE;
  }
  let high = new Int32Array(size);
  let low = new Int32Array(size);
  let nextHigh = new Int32Array(size);
  let nextLow = new Int32Array(size);
  let coins = 0;

  for (let level = maxBits; level >= 1; level--) {
    const row = (level - 1) * rowBytes;
    const packages = coins >>> 1;
    let leaf = 0;
    let pack = 0;
    let made = 0;
    while (leaf < count || pack < packages) {
      let packHigh = 0;
      let packLow = 0;
      let takeLeaf = pack >= packages;
      if (!takeLeaf) {
        packLow = low[2 * pack] + low[2 * pack + 1];
        packHigh = high[2 * pack] + high[2 * pack + 1] + (packLow >>> LOW_BITS);
        packLow &= LOW_SIZE - 1;
        takeLeaf =
          leaf < count &&
          (leafHigh[leaf] < packHigh || (leafHigh[leaf] === packHigh && leafLow[leaf] <= packLow));
      }
      if (takeLeaf) {
        nextHigh[made] = leafHigh[leaf];
        nextLow[made] = leafLow[leaf++];
        single[row + (made >>> 3)] |= 1 << (made & 7);
      } else {
        nextHigh[made] = packHigh;
        nextLow[made] = packLow;
        pack++;
      }
      made++;
    }
    coins = made;
    [high, nextHigh] = [nextHigh, high];
    [low, nextLow] = [nextLow, low];
  }

  // The symbols with a word of at least j bits are the lightest ones, as many as single coins at
  // the j-th fullest level.
  const bought = new Float64Array(maxBits);
  let take = 2 * count - 2;
  for (let level = 1; level <= maxBits; level++) {
    const row = (level - 1) * rowBytes;
    let singles = 0;
    for (let i = 0; i < take; i++) singles += (single[row + (i >>> 3)] >>> (i & 7)) & 1;
    bought[level - 1] = singles;
    take = 2 * (take - singles);
  }
  bought.sort().reverse();
  const lengthCounts = new Float64Array(maxBits + 1);
  for (let length = 1; length <= maxBits; length++)
    lengthCounts[length] = bought[length - 1] - (length < maxBits ? bought[length] : 0);
  return lengthCounts;
}
