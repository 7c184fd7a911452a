import { segmentBytes } from '../segments.ts';
import type { SymbolTaker, SymbolTakerFamily, Taken, TakerSource } from './taker.ts';

/** Segments that follow one another without a gap share the source's memory; others are copied. */
function take({ bytes, segments }: TakerSource): Taken {
  const { starts, ends } = segments;
  const count = starts.length;
  const total = segmentBytes(segments);
  const messageEnds = new Uint32Array(count);
  let symbols: Uint8Array;
  if (count > 0 && ends[count - 1] - starts[0] === total) {
    symbols = bytes.subarray(starts[0], ends[count - 1]);
    for (let i = 0; i < count; i++) messageEnds[i] = ends[i] - starts[0];
  } else {
    symbols = new Uint8Array(total);
    let at = 0;
    for (let i = 0; i < count; i++) {
      symbols.set(bytes.subarray(starts[i], ends[i]), at);
      at += ends[i] - starts[i];
      messageEnds[i] = at;
    }
  }
  return { values: { kind: 'symbols', alphabetSize: 256, symbols }, messageEnds };
}

const taker: SymbolTaker = {
  text: 'bytes',
  alphabet: 'natural',
  maxSymbolsPerByte: 1,
  takesRows: false,
  take,
  untake: (symbols) => Uint8Array.from(symbols),
};

/** Every byte is a symbol, m = 256. */
export const bytesFamily: SymbolTakerFamily = {
  word: 'bytes',
  summary: 'every byte, 0 to 255',
  create: () => taker,
};
