/** Words of one integer code as text, and back, through the loops that the coders run. */
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import type { IntegerFamily } from '../../src/coders/integer-family.ts';
import { newSymbolArray } from '../../src/symbols/sequence.ts';

/** The words of `symbols` one after another, as zeros and ones. */
export function bitsOf(family: IntegerFamily, symbols: readonly number[], parameter: number) {
  const writer = new BitWriter();
  family.encode(writer, Uint16Array.from(symbols), 0, symbols.length, parameter);
  const { bytes, bitLength } = writer.finish();
  return [...bytes]
    .map((byte) => byte.toString(2).padStart(8, '0'))
    .join('')
    .slice(0, bitLength);
}

/** The `count` symbols that `bits` hold, which must be used up. */
export function symbolsOf(family: IntegerFamily, bits: string, count: number, parameter: number) {
  const writer = new BitWriter();
  for (const bit of bits) writer.writeBits(Number(bit), 1);
  const reader = new BitReader(writer.finish().bytes);
  reader.limit = bits.length;
  const symbols = newSymbolArray(65_536, count);
  family.decode(reader, symbols, 0, count, parameter, 65_536);
  if (reader.position !== bits.length)
    throw new Error(`${bits.length - reader.position} bits left`);
  return [...symbols];
}
