import type { BitReader } from '../bits/bit-reader.ts';
import type { BitWriter } from '../bits/bit-writer.ts';
import { CorruptStreamError } from '../errors/errors.ts';

/**
 * Words that begin with a number in unary: so many zeros, ended by a one. Golomb's and Gallager's papers write ones ended by
 * a zero; ITU-T H.264 and RFC 9639 write them as here. Lengths are the same.
 */

/** Most bits that {@link BitReader.peekBits} finds in one load. */
const LOOK_BITS = 25;

/**
 * Writes `zeros` zeros, a one, and the low `width` bits of `rest`.
 * @param rest   below 2^width
 * @param width  0 … 26
 */
export function writeUnaryWord(
  writer: BitWriter,
  zeros: number,
  rest: number,
  width: number,
): void {
  const bits = zeros + 1 + width;
  if (bits <= 32) {
    // The zeros need no writing of their own.
    writer.writeBits((1 << width) | rest, bits);
    return;
  }
  writer.writeRun(0, zeros);
  writer.writeBits((1 << width) | rest, 1 + width);
}

/**
 * Reads zeros up to and with the one that ends them.
 * @param most  zeros that the longest word has
 * @returns the zeros
 * @throws CorruptStreamError where there are more, or the message ends before
 */
export function readZeros(reader: BitReader, most: number): number {
  let zeros = 0;
  for (;;) {
    const ahead = reader.peekBits(LOOK_BITS);
    const run = Math.clz32(ahead) - (32 - LOOK_BITS);
    zeros += run;
    if (zeros > most) refuseZeros(reader, most);
    if (run < LOOK_BITS) {
      reader.seek(reader.position + run + 1);
      return zeros;
    }
    reader.seek(reader.position + LOOK_BITS);
  }
}

function refuseZeros(reader: BitReader, most: number): never {
  throw new CorruptStreamError('a code word has a longer run of zeros than any symbol', {
    bitOffset: reader.position,
    expected: `at most ${most} zeros`,
    got: 'more',
  });
}

/** Refuses a word that stands for a number beyond the alphabet. */
export function refuseSymbol(reader: BitReader, symbol: number, alphabetSize: number): never {
  throw new CorruptStreamError('a decoded symbol is outside the alphabet', {
    bitOffset: reader.position,
    expected: `below ${alphabetSize}`,
    got: String(symbol),
  });
}
