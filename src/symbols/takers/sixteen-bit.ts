import { InputError } from '../../errors/errors.ts';
import { segmentBytes } from '../segments.ts';
import type { SymbolArray } from '../sequence.ts';
import type { SymbolTaker, SymbolTakerFamily, Taken, TakerSource } from './taker.ts';

interface Layout {
  /** 0 when the high byte comes first (big-endian), 1 when it comes second. */
  readonly highAt: 0 | 1;
  /** 0x8000 for two's complement: turning the sign bit over adds 32 768, so that order is kept. */
  readonly flip: 0 | 0x8000;
}

function take({ bytes, segments, file }: TakerSource, layout: Layout): Taken {
  const { starts, ends } = segments;
  const { highAt, flip } = layout;
  const lowAt = 1 - highAt;
  const symbols = new Uint16Array(Math.floor(segmentBytes(segments) / 2));
  const messageEnds = new Uint32Array(starts.length);
  let at = 0;
  for (let message = 0; message < starts.length; message++) {
    const start = starts[message];
    const end = ends[message];
    if ((end - start) % 2 !== 0) {
      throw new InputError(`a message of ${file} is not a whole number of 16-bit symbols`, {
        file,
        messageIndex: message,
        byteOffset: end - 1,
        expected: 'an even number of bytes',
        got: `${end - start} bytes`,
        advice: 'Cut the odd byte off, change how messages are cut, or take symbols as bytes.',
      });
    }
    for (let i = start; i < end; i += 2)
      symbols[at++] = ((bytes[i + highAt] << 8) | bytes[i + lowAt]) ^ flip;
    messageEnds[message] = at;
  }
  return { values: { kind: 'symbols', alphabetSize: 65536, symbols }, messageEnds };
}

function untake(symbols: SymbolArray, { highAt, flip }: Layout): Uint8Array {
  const bytes = new Uint8Array(symbols.length * 2);
  const lowAt = 1 - highAt;
  for (let i = 0; i < symbols.length; i++) {
    const unit = symbols[i] ^ flip;
    bytes[2 * i + highAt] = unit >>> 8;
    bytes[2 * i + lowAt] = unit & 0xff;
  }
  return bytes;
}

function familyOf(word: string, summary: string, layout: Layout): SymbolTakerFamily {
  const taker: SymbolTaker = {
    text: word,
    alphabet: 'natural',
    maxSymbolsPerByte: 0.5,
    takesRows: false,
    take: (source) => take(source, layout),
    untake: (symbols) => untake(symbols, layout),
  };
  return { word, summary, create: () => taker };
}

/** The 16-bit takers, m = 65 536; a signed value v is the symbol v + 32 768. */
export const sixteenBitFamilies: readonly SymbolTakerFamily[] = [
  familyOf('u16le', 'unsigned 16-bit numbers, low byte first', { highAt: 1, flip: 0 }),
  familyOf('u16be', 'unsigned 16-bit numbers, high byte first', { highAt: 0, flip: 0 }),
  familyOf('s16le', 'signed 16-bit numbers, low byte first', { highAt: 1, flip: 0x8000 }),
  familyOf('s16be', 'signed 16-bit numbers, high byte first', { highAt: 0, flip: 0x8000 }),
];
