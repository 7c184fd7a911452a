import { BugError, CorruptStreamError, LimitError } from '../errors/errors.ts';
import { newSymbolArray, type SymbolArray, type SymbolChunk } from '../symbols/sequence.ts';
import type { TransformPass } from './transform.ts';

/** How symbols are taken apart: `count` planes of `bits` bits each, the most significant first. */
export interface Planes {
  readonly bits: 1 | 8;
  readonly count: number;
}

/** Each message as its planes, one after another. */
export function planesOf(planes: Planes): TransformPass {
  const { bits, count } = planes;
  const mask = (1 << bits) - 1;
  return wholeMessagePass(2 ** bits, count, (source, from, to, target, at) => {
    let out = at;
    for (let shift = (count - 1) * bits; shift >= 0; shift -= bits) {
      for (let i = from; i < to; i++) target[out++] = (source[i] >>> shift) & mask;
    }
    return out;
  });
}

/** Puts planes together again. */
export function fromPlanes(planes: Planes, alphabetSize: number): TransformPass {
  const { bits, count } = planes;
  return wholeMessagePass(alphabetSize, 1 / count, (source, from, to, target, at) => {
    const length = (to - from) / count;
    if (!Number.isInteger(length)) {
      throw new CorruptStreamError('the planes of a message are not of equal length', {
        expected: `a multiple of ${count} symbols`,
        got: `${to - from} symbols`,
      });
    }
    for (let i = 0; i < length; i++) {
      let symbol = 0;
      for (let plane = from + i; plane < to; plane += length)
        symbol = (symbol << bits) | source[plane];
      symbol >>>= 0;
      if (symbol >= alphabetSize) {
        throw new CorruptStreamError('the planes of a symbol make one outside the alphabet', {
          symbolIndex: at + i,
          expected: `below ${alphabetSize}`,
          got: String(symbol),
        });
      }
      target[at + i] = symbol;
    }
    return at + length;
  });
}

function refuseLength(expected: number, got: number): never {
  throw new BugError('an open message has another length than it said', {
    expected: `${expected} symbols`,
    got: `${got} symbols`,
  });
}

/** Turns `source[from … to − 1]`, one whole message, into symbols of `target` from `at` on; returns where they end. */
type MessageKernel = (
  source: SymbolArray,
  from: number,
  to: number,
  target: SymbolArray,
  at: number,
) => number;

/**
 * A pass that calls `kernel` with each whole message; only a message that lies across chunks is copied.
 * @param alphabetSize  of what comes out
 * @param growth        symbols that come out for each that goes in, for the room to make
 */
function wholeMessagePass(
  alphabetSize: number,
  growth: number,
  kernel: MessageKernel,
): TransformPass {
  let gathered: SymbolArray | undefined;
  let filled = 0;

  function gather(chunk: SymbolChunk, from: number, to: number, whole: number): void {
    gathered ??= newSymbolArray(chunk.alphabetSize, whole);
    if (filled + to - from > gathered.length) refuseLength(gathered.length, filled + to - from);
    gathered.set(chunk.symbols.subarray(from, to), filled);
    filled += to - from;
  }

  return {
    push(chunk) {
      const { symbols, messageEnds, openSymbolCount } = chunk;
      const complete = messageEnds.length === 0 ? 0 : messageEnds[messageEnds.length - 1];
      const room =
        messageEnds.length === 0 ? 0 : Math.ceil(growth * ((gathered?.length ?? 0) + complete));
      if (room > 2 ** 32 - 1) {
        throw new LimitError('the planes of a chunk are too many symbols', {
          expected: 'at most 2^32 − 1',
          got: String(room),
        });
      }
      const target = newSymbolArray(alphabetSize, room);
      const ends = new Uint32Array(messageEnds.length);
      let from = 0;
      let at = 0;
      for (let i = 0; i < messageEnds.length; i++) {
        const to = messageEnds[i];
        if (gathered === undefined) {
          at = kernel(symbols, from, to, target, at);
        } else {
          gather(chunk, from, to, gathered.length);
          if (filled !== gathered.length) refuseLength(gathered.length, filled);
          at = kernel(gathered, 0, filled, target, at);
          gathered = undefined;
          filled = 0;
        }
        ends[i] = at;
        from = to;
      }
      if (from < symbols.length || openSymbolCount !== undefined) {
        if (openSymbolCount === undefined) {
          throw new BugError(
            'a chunk ends within a message and does not say how long that message is',
          );
        }
        gather(chunk, from, symbols.length, openSymbolCount);
      }
      return { alphabetSize, symbols: target.subarray(0, at), messageEnds: ends };
    },
    finish() {
      if (gathered !== undefined) throw new BugError('the last message was not ended');
    },
  };
}
