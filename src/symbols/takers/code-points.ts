import { CorruptStreamError } from '../../errors/errors.ts';
import type { AlphabetMap } from '../alphabet-map.ts';
import type { SymbolArray } from '../sequence.ts';
import { countCodePoints, isScalarValue, putUtf8, takeCodePoints, utf8Length } from '../utf8.ts';
import type { SymbolTaker, SymbolTakerFamily, Taken, TakerSource } from './taker.ts';

function take({ bytes, segments, file }: TakerSource): Taken {
  const { starts, ends } = segments;
  let count = 0;
  for (let i = 0; i < starts.length; i++) count += countCodePoints(bytes, starts[i], ends[i]);
  const codePoints = new Uint32Array(count);
  const messageEnds = new Uint32Array(starts.length);
  let at = 0;
  for (let i = 0; i < starts.length; i++) {
    at = takeCodePoints(bytes, starts[i], ends[i], codePoints, at, file);
    messageEnds[i] = at;
  }
  return { values: { kind: 'code-points', codePoints }, messageEnds };
}

/** Without a map the symbols are the code points themselves, as under a given alphabet. */
function untake(symbols: SymbolArray, map?: AlphabetMap): Uint8Array {
  const values = map?.kind === 'code-points' ? map.values : undefined;
  let length = 0;
  for (let i = 0; i < symbols.length; i++) {
    const symbol = symbols[i];
    const codePoint = values === undefined ? symbol : values[symbol];
    if (codePoint === undefined || !isScalarValue(codePoint)) {
      throw new CorruptStreamError('a symbol stands for no code point', {
        symbolIndex: i,
        expected: values === undefined ? 'a code point' : `a symbol below ${values.length}`,
        got: String(symbol),
      });
    }
    length += utf8Length(codePoint);
  }
  const bytes = new Uint8Array(length);
  let at = 0;
  for (let i = 0; i < symbols.length; i++)
    at = putUtf8(values === undefined ? symbols[i] : values[symbols[i]], bytes, at);
  return bytes;
}

const taker: SymbolTaker = {
  text: 'codepoints',
  alphabet: 'map',
  maxSymbolsPerByte: 1,
  takesRows: false,
  take,
  untake,
};

/** Every code point of UTF-8 text; the alphabet is the sorted code points found. */
export const codePointsFamily: SymbolTakerFamily = {
  word: 'codepoints',
  summary: 'every code point of UTF-8 text; the alphabet is what is found',
  create: () => taker,
};
