import { BugError, InputError } from '../errors/errors.ts';
import { type AlphabetMap, alphabetMapSize, MAX_ALPHABET_SIZE } from '../symbols/alphabet-map.ts';
import { newSymbolArray, type SymbolArray } from '../symbols/sequence.ts';
import type { TakenValues } from '../symbols/takers/taker.ts';
import { compareByCodePoint, LAST_CODE_POINT } from '../symbols/utf8.ts';
import { type Corpus, type CorpusAlphabet, placeOfSymbol, type RawCorpus } from './corpus.ts';
import type { SplitSide } from './decide-split.ts';

type Found = Exclude<TakenValues, { kind: 'symbols' }>;

/** Ids of all values under a map, and the first value that the map lacks. */
interface Mapped {
  readonly symbols: SymbolArray;
  /** Index of the first value outside the alphabet, −1 when there is none. */
  readonly outside: number;
}

/**
 * Turns raw values into symbols 0 … m − 1.
 *
 * A natural alphabet is the taker's own; a given one (`alphabet: N`) takes values as they stand; else the alphabet is
 * what the train side of `split` holds, or all data without a split: sorted, except that quantised numbers take the whole
 * range between their ends.
 * @throws InputError for a value outside a given alphabet, for a test symbol that train lacks (both with file, message,
 *   symbol and value), and for a range of more than 2^24 steps
 */
export function fixAlphabet(
  raw: RawCorpus,
  split?: { readonly train: Pick<SplitSide, 'starts' | 'ends'> },
): Corpus {
  const { values, messageEnds, givenAlphabet, ...facts } = raw;
  let alphabetSize: number;
  let symbols: SymbolArray;
  let alphabet: CorpusAlphabet;
  if (givenAlphabet !== undefined) {
    alphabetSize = givenAlphabet;
    symbols = underGiven(raw, givenAlphabet);
    alphabet = { kind: 'given' };
  } else if (values.kind === 'symbols') {
    ({ alphabetSize, symbols } = values);
    alphabet = { kind: 'natural' };
  } else {
    const map = findMap(values, split?.train ?? wholeOf(messageEnds), raw.name);
    const mapped = applyMap(values, map);
    if (mapped.outside >= 0) refuseOutsideMap(raw, mapped.outside, map);
    alphabetSize = alphabetMapSize(map);
    symbols = mapped.symbols;
    alphabet = { kind: 'map', map, foundOn: split === undefined ? 'all' : 'train' };
  }
  return { ...facts, alphabet, sequence: { alphabetSize, symbols, messageEnds } };
}

function wholeOf(messageEnds: Uint32Array): Pick<SplitSide, 'starts' | 'ends'> {
  return { starts: Uint32Array.of(0), ends: messageEnds.slice(-1) };
}

function findMap(
  values: Found,
  side: Pick<SplitSide, 'starts' | 'ends'>,
  corpus: string,
): AlphabetMap {
  const { starts, ends } = side;
  if (values.kind === 'quantised') return findRange(values.integers, starts, ends, corpus);
  const distinct = values.kind === 'code-points' ? LAST_CODE_POINT + 1 : values.texts.length;
  const data = values.kind === 'code-points' ? values.codePoints : values.ids;
  const seen = new Uint8Array(distinct);
  for (let piece = 0; piece < starts.length; piece++)
    for (let i = starts[piece]; i < ends[piece]; i++) seen[data[i]] = 1;
  const present: number[] = [];
  for (let value = 0; value < distinct; value++) if (seen[value] === 1) present.push(value);
  if (values.kind === 'code-points')
    return { kind: 'code-points', values: Uint32Array.from(present) };
  const texts = present.map((id) => values.texts[id]).sort(compareByCodePoint);
  return { kind: 'texts', values: texts };
}

function findRange(
  integers: Float64Array,
  starts: Uint32Array,
  ends: Uint32Array,
  corpus: string,
): AlphabetMap {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let piece = 0; piece < starts.length; piece++) {
    for (let i = starts[piece]; i < ends[piece]; i++) {
      if (integers[i] < low) low = integers[i];
      if (integers[i] > high) high = integers[i];
    }
  }
  const size = high - low + 1;
  if (size > MAX_ALPHABET_SIZE) {
    throw new InputError(`the numbers of the corpus ${corpus} span too many steps`, {
      key: 'step',
      expected: `at most ${MAX_ALPHABET_SIZE} steps from the lowest to the highest number`,
      got: `${size} steps, from ${low} to ${high}`,
      advice: 'Use a larger step.',
    });
  }
  return { kind: 'range', low, size };
}

function applyMap(values: Found, map: AlphabetMap): Mapped {
  const size = alphabetMapSize(map);
  if (values.kind === 'quantised' && map.kind === 'range') {
    const { integers } = values;
    const symbols = newSymbolArray(size, integers.length);
    let outside = -1;
    for (let i = 0; i < integers.length; i++) {
      const id = integers[i] - map.low;
      if (id >= 0 && id < size) symbols[i] = id;
      else if (outside < 0) outside = i;
    }
    return { symbols, outside };
  }
  if (values.kind === 'code-points' && map.kind === 'code-points') {
    const idOf = new Int32Array(LAST_CODE_POINT + 1).fill(-1);
    map.values.forEach((value, id) => {
      idOf[value] = id;
    });
    return lookUp(values.codePoints, idOf, size);
  }
  if (values.kind === 'texts' && map.kind === 'texts') {
    const idOfText = new Map(map.values.map((text, id) => [text, id]));
    const idOf = Int32Array.from(values.texts, (text) => idOfText.get(text) ?? -1);
    return lookUp(values.ids, idOf, size);
  }
  throw new BugError(`a map of ${map.kind} does not fit values that are ${values.kind}`);
}

function lookUp(data: Uint32Array, idOf: Int32Array, size: number): Mapped {
  const symbols = newSymbolArray(size, data.length);
  let outside = -1;
  for (let i = 0; i < data.length; i++) {
    const id = idOf[data[i]];
    if (id >= 0) symbols[i] = id;
    else if (outside < 0) outside = i;
  }
  return { symbols, outside };
}

/** A value as a person would look for it in the source. */
function shownValue(values: TakenValues, index: number): string {
  switch (values.kind) {
    case 'symbols':
      return String(values.symbols[index]);
    case 'quantised':
      return `${values.integers[index]} steps`;
    case 'texts':
      return JSON.stringify(values.texts[values.ids[index]]);
    case 'code-points': {
      const codePoint = values.codePoints[index];
      const hex = codePoint.toString(16).toUpperCase().padStart(4, '0');
      return `U+${hex} ${JSON.stringify(String.fromCodePoint(codePoint))}`;
    }
  }
}

function refuseOutsideMap(raw: RawCorpus, index: number, map: AlphabetMap): never {
  const size = alphabetMapSize(map);
  throw new InputError(
    `a test symbol of the corpus ${raw.name} is outside the alphabet that its train part shows`,
    {
      ...placeOfSymbol(raw, index),
      expected:
        map.kind === 'range'
          ? `${map.low} to ${map.low + size - 1} steps`
          : `one of the ${size} symbols of the train part`,
      got: shownValue(raw.values, index),
      advice:
        map.kind === 'texts'
          ? 'Split with order: random, or use a larger share for train.'
          : 'Give alphabet: N in the plan (--alphabet N), split with order: random, or use a larger share for train.',
    },
  );
}

/** A value as a symbol of a given alphabet: as it stands; a text must be written as a whole number. */
function underGiven(raw: RawCorpus, alphabetSize: number): SymbolArray {
  const { values } = raw;
  let data: SymbolArray | Float64Array;
  if (values.kind === 'symbols') data = values.symbols;
  else if (values.kind === 'code-points') data = values.codePoints;
  else if (values.kind === 'quantised') data = values.integers;
  else {
    const numbers = Float64Array.from(values.texts, (t) => (/^\d{1,15}$/.test(t) ? Number(t) : -1));
    data = new Float64Array(values.ids.length);
    for (let i = 0; i < data.length; i++) data[i] = numbers[values.ids[i]];
  }
  const symbols = newSymbolArray(alphabetSize, data.length);
  for (let i = 0; i < data.length; i++) {
    const value = data[i];
    if (!(value >= 0 && value < alphabetSize)) {
      throw new InputError(`a symbol of the corpus ${raw.name} is outside the given alphabet`, {
        ...placeOfSymbol(raw, i),
        expected: `a whole number from 0 to ${alphabetSize - 1}`,
        got: shownValue(values, i),
        advice: 'Give a larger alphabet: in the plan, or leave it out.',
      });
    }
    symbols[i] = value;
  }
  return symbols;
}
