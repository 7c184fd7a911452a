import { CorruptStreamError, PromiseError } from '../errors/errors.ts';
import type { BitReader } from './bit-reader.ts';
import type { BitWriter } from './bit-writer.ts';

/**
 * Elias delta code of v + 1, the one code in which every count and length is written here, whatever
 * the candidate.
 * Source: P. Elias, IEEE Trans. Inf. Theory 21(2), 1975, section "The code δ". Values 0 … 2^53 − 2.
 */

/** Counts below this take one write and one look: at most 21 bits. */
const SHORT_COUNTS = 2 ** 15 - 1;

function bitLengthOf(value: number): number {
  if (value < 0x100000000) return 32 - Math.clz32(value);
  return 64 - Math.clz32(Math.floor(value / 0x100000000));
}

/** Bits that {@link writeCount} takes for `value`. */
export function countBits(value: number): number {
  const length = bitLengthOf(value + 1);
  return 2 * (bitLengthOf(length) - 1) + length;
}

/** Writes `value` (an integer, 0 … 2^53 − 2) and returns the number of bits written. */
export function writeCount(writer: BitWriter, value: number): number {
  if (value >>> 0 === value && value < SHORT_COUNTS) {
    const number = value + 1;
    const length = 32 - Math.clz32(number);
    const bits = 2 * (31 - Math.clz32(length)) + length;
    // The leading zeros need no writing of their own: length and rest make one number.
    writer.writeBits((length << (length - 1)) | (number ^ (1 << (length - 1))), bits);
    return bits;
  }
  if (!Number.isSafeInteger(value) || value < 0 || value >= Number.MAX_SAFE_INTEGER) {
    throw new PromiseError(`cannot write ${value} as a count`, {
      expected: 'an integer from 0 to 2^53 − 2',
    });
  }
  const number = value + 1;
  const length = bitLengthOf(number);
  const lengthOfLength = bitLengthOf(length);
  writer.writeRun(0, lengthOfLength - 1);
  writer.writeBits(length, lengthOfLength);
  // The leading 1 of the number is implied by its length.
  const rest = number - 2 ** (length - 1);
  if (length - 1 > 32) {
    writer.writeBits(Math.floor(rest / 0x100000000), length - 1 - 32);
    writer.writeBits(rest % 0x100000000, 32);
  } else {
    writer.writeBits(rest, length - 1);
  }
  return 2 * (lengthOfLength - 1) + length;
}

/** Reads what {@link writeCount} wrote. Throws CorruptStreamError on a word that no count has. */
export function readCount(reader: BitReader): number {
  const start = reader.position;
  // The words of short counts have at most 3 zeros and 21 bits: one look reads them.
  const ahead = reader.peekBits(25);
  const leading = Math.clz32(ahead) - 7;
  if (leading <= 3) {
    const shortLength = ahead >>> (24 - 2 * leading);
    const bits = 2 * leading + shortLength;
    const rest = (ahead >>> (25 - bits)) & ((1 << (shortLength - 1)) - 1);
    reader.seek(start + bits);
    return (1 << (shortLength - 1)) + rest - 1;
  }
  let zeros = 0;
  while (reader.readBits(1) === 0) {
    zeros++;
    if (zeros > 5) {
      throw new CorruptStreamError('a count is written with too many leading zeros', {
        bitOffset: start,
      });
    }
  }
  const length = 2 ** zeros + reader.readBits(zeros);
  if (length > 53) {
    throw new CorruptStreamError('a count is larger than any that is written', {
      bitOffset: start,
      expected: 'at most 53 bits',
      got: `${length} bits`,
    });
  }
  const high = length - 1 > 32 ? reader.readBits(length - 1 - 32) * 0x100000000 : 0;
  return 2 ** (length - 1) + high + reader.readBits(Math.min(32, length - 1)) - 1;
}
