import { BugError, InputError } from '../../errors/errors.ts';
import { checkWholeRecords, type FieldType, symbolFieldOf } from '../record.ts';
import { segmentBytes } from '../segments.ts';
import type { SymbolTaker, SymbolTakerFamily, Taken, TakerSource } from './taker.ts';

/** Where the parts of a field lie in it, and the bits turned over so that signed values keep their order. */
const LAYOUTS: Record<FieldType, { highAt: number; lowAt: number; flip: number }> = {
  u8: { highAt: -1, lowAt: 0, flip: 0 },
  s8: { highAt: -1, lowAt: 0, flip: 0x80 },
  u16le: { highAt: 1, lowAt: 0, flip: 0 },
  u16be: { highAt: 0, lowAt: 1, flip: 0 },
  s16le: { highAt: 1, lowAt: 0, flip: 0x8000 },
  s16be: { highAt: 0, lowAt: 1, flip: 0x8000 },
};

function take({ bytes, segments, file, record }: TakerSource, name: string): Taken {
  if (record === undefined) throw new BugError(`field:${name} was taken without a record`);
  const field = symbolFieldOf(record, name);
  const { starts, ends } = segments;
  if (starts.length === 1) checkWholeRecords(ends[0] - starts[0], record, file);
  const { highAt, lowAt, flip } = LAYOUTS[field.type];
  const count = Math.floor(segmentBytes(segments) / record.bytes);
  const wide = field.widthBytes === 2;
  const symbols = wide ? new Uint16Array(count) : new Uint8Array(count);
  const messageEnds = new Uint32Array(starts.length);
  const stride = record.bytes;
  let at = 0;
  for (let message = 0; message < starts.length; message++) {
    const length = ends[message] - starts[message];
    if (length % stride !== 0) refuseRagged(message, starts[message], length, stride, file);
    const end = ends[message] + field.offsetBytes;
    if (wide) {
      for (let i = starts[message] + field.offsetBytes; i < end; i += stride)
        symbols[at++] = ((bytes[i + highAt] << 8) | bytes[i + lowAt]) ^ flip;
    } else {
      for (let i = starts[message] + field.offsetBytes; i < end; i += stride)
        symbols[at++] = bytes[i] ^ flip;
    }
    messageEnds[message] = at;
  }
  const alphabetSize = wide ? 65536 : 256;
  return { values: { kind: 'symbols', alphabetSize, symbols }, messageEnds };
}

function refuseRagged(
  messageIndex: number,
  byteOffset: number,
  length: number,
  stride: number,
  file: string,
): never {
  throw new InputError(`a message of ${file} is not a whole number of records`, {
    file,
    messageIndex,
    byteOffset,
    expected: `a multiple of ${stride} bytes, the size of one record`,
    got: `${length} bytes`,
  });
}

/** One field of a fixed record: a symbol a record. A signed value v is the symbol v + 128 or v + 32 768. */
export const recordFieldFamily: SymbolTakerFamily = {
  word: 'field:',
  summary: 'one field of each record: field:NAME',
  create: (name): SymbolTaker => ({
    text: `field:${name}`,
    // Records of one byte are the densest.
    maxSymbolsPerByte: 1,
    field: name,
    takesRows: false,
    alphabet: 'natural',
    take: (source) => take(source, name),
  }),
};
