import { CorruptStreamError } from '../../errors/errors.ts';
import { segmentBytes } from '../segments.ts';
import type { SymbolArray } from '../sequence.ts';
import type { SymbolTaker, SymbolTakerFamily, Taken, TakerSource } from './taker.ts';

/** Cuts each byte into equal parts of `width` bits, the most significant first. */
function take({ bytes, segments }: TakerSource, width: 1 | 4): Taken {
  const { starts, ends } = segments;
  const perByte = 8 / width;
  const mask = (1 << width) - 1;
  const symbols = new Uint8Array(segmentBytes(segments) * perByte);
  const messageEnds = new Uint32Array(starts.length);
  let at = 0;
  for (let message = 0; message < starts.length; message++) {
    const end = ends[message];
    for (let i = starts[message]; i < end; i++) {
      const byte = bytes[i];
      for (let shift = 8 - width; shift >= 0; shift -= width)
        symbols[at++] = (byte >>> shift) & mask;
    }
    messageEnds[message] = at;
  }
  return { values: { kind: 'symbols', alphabetSize: 1 << width, symbols }, messageEnds };
}

function untake(symbols: SymbolArray, width: 1 | 4): Uint8Array {
  const perByte = 8 / width;
  if (symbols.length % perByte !== 0) {
    throw new CorruptStreamError('the symbols do not make whole bytes', {
      expected: `a multiple of ${perByte} symbols`,
      got: `${symbols.length} symbols`,
    });
  }
  const bytes = new Uint8Array(symbols.length / perByte);
  let next = 0;
  for (let i = 0; i < bytes.length; i++) {
    let byte = 0;
    for (let part = 0; part < perByte; part++) byte = (byte << width) | symbols[next++];
    bytes[i] = byte;
  }
  return bytes;
}

function takerOf(text: string, width: 1 | 4): SymbolTaker {
  return {
    text,
    alphabet: 'natural',
    maxSymbolsPerByte: 8 / width,
    takesRows: false,
    take: (source) => take(source, width),
    untake: (symbols) => untake(symbols, width),
  };
}

const bits = takerOf('bits', 1);
const nibbles = takerOf('nibbles', 4);

/** Every bit, the most significant of a byte first, m = 2. */
export const bitsFamily: SymbolTakerFamily = {
  word: 'bits',
  summary: 'every bit, the most significant first',
  create: () => bits,
};

/** Every half byte, the high one first, m = 16. */
export const nibblesFamily: SymbolTakerFamily = {
  word: 'nibbles',
  summary: 'every half byte, the high one first',
  create: () => nibbles,
};
