/**
 * Integers of up to 32 bits as a token, which a model codes, and extra bits, which are as good as
 * equally likely.
 *
 * 0 … 15 are tokens of their own. Above, a token says the bit length and the bit below the leading
 * one; what is left follows as extra bits. A width of w ≥ 4 bits has 16 + 2 (w − 4) tokens.
 */

/** Values below this are their own token. */
const DIRECT = 16;
const DIRECT_BITS = 4;

/** Tokens of a width of 32 bits. */
export const MOST_TOKENS = DIRECT + 2 * (32 - DIRECT_BITS);

/** Tokens that values below 2^width can have. */
export function tokenCount(width: number): number {
  return width <= DIRECT_BITS ? 2 ** width : DIRECT + 2 * (width - DIRECT_BITS);
}

/** Token of an unsigned value of 32 bits. */
export function tokenOf(value: number): number {
  if (value >>> 0 < DIRECT) return value;
  const length = 32 - Math.clz32(value);
  return DIRECT + 2 * (length - 1 - DIRECT_BITS) + ((value >>> (length - 2)) & 1);
}

/** Extra bits after each token, 0 … 30. */
export const EXTRA_BITS = Uint8Array.from({ length: MOST_TOKENS }, (_, token) =>
  token < DIRECT ? 0 : DIRECT_BITS - 1 + ((token - DIRECT) >>> 1),
);

/** Least value of each token. */
export const LEAST_VALUE = Uint32Array.from({ length: MOST_TOKENS }, (_, token) =>
  token < DIRECT ? token : (2 + ((token - DIRECT) & 1)) * 2 ** EXTRA_BITS[token],
);

/** Size classes that contexts tell apart. */
export const BUCKETS = 8;

/** Size class of a difference: its bit length, at most 7. */
export function bucketOf(residual: number): number {
  const length = 32 - Math.clz32(residual);
  return length < BUCKETS ? length : BUCKETS - 1;
}
