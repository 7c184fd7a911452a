/**
 * The arithmetic that range encoder and decoder share: precision, and how a message's code string ends.
 *
 * All quantities are integers held in doubles. A quotient of integers below 2^53, rounded down, is exact in doubles, so
 * both ends agree on every machine.
 */

/** Width of the coding interval, as a candidate's `range=` says it. */
export type RangeBits = 32 | 48;

export interface RangePrecision {
  readonly bits: RangeBits;
  /** 2^bits: where `low` overflows into a carry. */
  readonly top: number;
  /** 2^48, or 2^32 − 1 so that a 32-bit device can hold it. */
  readonly initialRange: number;
  /** 2^(bits − 8): below it the interval is renormalised by a byte. */
  readonly shiftBelow: number;
  /** log2 of the initial range. */
  readonly initialBits: number;
}

const PRECISIONS: Readonly<Record<RangeBits, RangePrecision>> = {
  32: {
    bits: 32,
    top: 2 ** 32,
    initialRange: 2 ** 32 - 1,
    shiftBelow: 2 ** 24,
    initialBits: Math.log2(2 ** 32 - 1),
  },
  48: { bits: 48, top: 2 ** 48, initialRange: 2 ** 48, shiftBelow: 2 ** 40, initialBits: 48 },
};

export function rangePrecision(bits: RangeBits): RangePrecision {
  return PRECISIONS[bits];
}

const HALF = 2 ** 24;

/** Index of the highest set bit of an integer 1 … 2^53 − 1. */
function highestBit(value: number): number {
  const high = Math.floor(value / HALF);
  return high > 0 ? 55 - Math.clz32(high) : 31 - Math.clz32(value);
}

/** Index of the highest bit in which two different integers below 2^53 differ. */
function highestDifference(a: number, b: number): number {
  const highA = Math.floor(a / HALF);
  const highB = Math.floor(b / HALF);
  if (highA !== highB) return 24 + 31 - Math.clz32(highA ^ highB);
  return 31 - Math.clz32((a - highA * HALF) ^ (b - highB * HALF));
}

/**
 * Bits that end a code string whose continuation is known to be zeros (the message's end is carried for free).
 *
 * The value in [low, low + range) with the most trailing zeros is the upper end cut after the first bit in which it
 * differs from low − 1; its bits up to the last 1 are the ending. It may be no bit at all, with a carry.
 *
 * With p = bits − log2(range), what is left of the payload: −8 ≤ ending − p < 1.
 */
export function endingByZeros(precision: RangePrecision, low: number, range: number): number {
  if (low === 0) return 0;
  return Math.max(0, precision.bits - highestDifference(low - 1, low + range - 1));
}

/**
 * Bits that end a code string so that any continuation decodes the same: the decoder, which knows low and range too,
 * then sees for itself where the message ends, and no length needs to be paid for.
 *
 * The least l for which a whole block of 2^(bits − l) values on its own boundary lies in [low, low + range);
 * 0 ≤ ending − p < 2. Of an untouched interval nothing is written.
 */
export function endingForAny(precision: RangePrecision, low: number, range: number): number {
  if (low === 0 && range === precision.initialRange) return 0;
  const exponent = highestBit(range);
  const unit = 2 ** exponent;
  const start = Math.ceil(low / unit) * unit;
  return precision.bits - exponent + (start + unit <= low + range ? 0 : 1);
}
