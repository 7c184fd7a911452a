import type { BitReader } from '../bits/bit-reader.ts';
import type { BitWriter } from '../bits/bit-writer.ts';
import { CorruptStreamError } from '../errors/errors.ts';

/**
 * Sets of integers below 2^53 − 1, for the tables of prefix codes: which symbols have words, and
 * which of these have words of one length. Two ways to write a sorted set of known size.
 * `interpolative` writes the middle member first, within the room that the others leave it, then
 * both halves; close to log2 of the number of such sets, less where members cluster, nothing where
 * all are in. `gaps` writes the distances; cheaper for a few members in clusters.
 *
 * Sources: A. Moffat, L. Stuiver, Information Retrieval 3(1), 2000 (interpolative); P. Elias, IEEE
 * Trans. Inf. Theory 21(2), 1975 (the code γ, for gaps).
 */

/** Number of bits of v ≥ 1, up to 2^53. */
function bitLengthOf(v: number): number {
  return v < 0x100000000 ? 32 - Math.clz32(v) : 64 - Math.clz32(Math.floor(v / 0x100000000));
}

/** Writes an integer of up to 53 bits. */
function writeWide(writer: BitWriter, value: number, width: number): void {
  if (width > 32) {
    writer.writeBits(Math.floor(value / 0x100000000), width - 32);
    writer.writeBits(value % 0x100000000, 32);
  } else {
    writer.writeBits(value, width);
  }
}

function readWide(reader: BitReader, width: number): number {
  if (width <= 32) return reader.readBits(width);
  const high = reader.readBits(width - 32);
  return high * 0x100000000 + reader.readBits(32);
}

/**
 * Minimal binary (truncated binary) code of `value` in 0 … size − 1: the lower values have the
 * shorter words.
 * @param writer  undefined: only count
 * @returns bits, ⌊log2 size⌋ or ⌈log2 size⌉
 */
export function writeWithin(writer: BitWriter | undefined, value: number, size: number): number {
  if (size <= 1) return 0;
  const width = bitLengthOf(size - 1);
  const short = 2 ** width - size;
  const bits = value < short ? width - 1 : width;
  if (writer !== undefined) writeWide(writer, value < short ? value : value + short, bits);
  return bits;
}

/** Reads what {@link writeWithin} wrote; always below `size`. */
export function readWithin(reader: BitReader, size: number): number {
  if (size <= 1) return 0;
  const width = bitLengthOf(size - 1);
  const short = 2 ** width - size;
  const value = readWide(reader, width - 1);
  return value < short ? value : value * 2 + reader.readBits(1) - short;
}

/** An array of sorted distinct integers. */
export type Members = Float64Array | Uint32Array;

/**
 * Writes `members[from … to − 1]`, which lie in low … high − 1.
 * @param writer  undefined: only count
 * @returns bits
 */
export function writeSubset(
  writer: BitWriter | undefined,
  members: Members,
  from: number,
  to: number,
  low: number,
  high: number,
): number {
  if (from >= to || high - low === to - from) return 0;
  const middle = (from + to) >>> 1;
  const least = low + (middle - from);
  const room = high - (to - 1 - middle) - least;
  const value = members[middle];
  return (
    writeWithin(writer, rotate(value - least, room), room) +
    writeSubset(writer, members, from, middle, low, value) +
    writeSubset(writer, members, middle + 1, to, value + 1, high)
  );
}

/**
 * Reads what {@link writeSubset} wrote into `members[from … to − 1]`; needs to − from ≤ high − low.
 */
export function readSubset(
  reader: BitReader,
  members: Members,
  from: number,
  to: number,
  low: number,
  high: number,
): void {
  if (from >= to) return;
  if (high - low === to - from) {
    for (let i = from; i < to; i++) members[i] = low + (i - from);
    return;
  }
  const middle = (from + to) >>> 1;
  const least = low + (middle - from);
  const room = high - (to - 1 - middle) - least;
  const value = least + rotateBack(readWithin(reader, room), room);
  members[middle] = value;
  readSubset(reader, members, from, middle, low, value);
  readSubset(reader, members, middle + 1, to, value + 1, high);
}

/**
 * First of the values that get the shorter words: those in the middle of the room, where the middle
 * member mostly lies.
 */
function shortStart(room: number): number {
  if (room <= 1) return 0;
  const short = 2 ** bitLengthOf(room - 1) - room;
  return Math.floor((room - short) / 2);
}

function rotate(value: number, room: number): number {
  const start = shortStart(room);
  return value >= start ? value - start : value - start + room;
}

function rotateBack(value: number, room: number): number {
  const start = shortStart(room);
  // In this order no sum passes 2^53.
  return value < room - start ? value + start : value - (room - start);
}

/** Writes `members[0 … count − 1]` by their distances; as {@link writeSubset}. */
export function writeGaps(writer: BitWriter | undefined, members: Members, count: number): number {
  let bits = 0;
  let next = 0;
  for (let i = 0; i < count; i++) {
    const distance = members[i] - next + 1;
    const width = bitLengthOf(distance);
    bits += 2 * width - 1;
    if (writer !== undefined) {
      writer.writeRun(0, width - 1);
      writeWide(writer, distance, width);
    }
    next = members[i] + 1;
  }
  return bits;
}

/**
 * Reads what {@link writeGaps} wrote. Throws CorruptStreamError when a member is `high` or above.
 */
export function readGaps(reader: BitReader, members: Members, count: number, high: number): void {
  let next = 0;
  for (let i = 0; i < count; i++) {
    const start = reader.position;
    let zeros = 0;
    while (zeros <= 52 && reader.readBits(1) === 0) zeros++;
    const distance = zeros <= 52 ? 2 ** zeros + readWide(reader, zeros) : Number.POSITIVE_INFINITY;
    const member = next + distance - 1;
    if (member >= high) {
      throw new CorruptStreamError('a table names a symbol outside the alphabet', {
        bitOffset: start,
        expected: `below ${high}`,
      });
    }
    members[i] = member;
    next = member + 1;
  }
}
