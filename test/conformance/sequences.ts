/**
 * Sequences for the conformance kit: degenerate ones by hand, others drawn; and cuts of a sequence
 * into chunks.
 */
import fc from 'fast-check';
import {
  newSymbolArray,
  type SymbolArray,
  type SymbolChunk,
  type SymbolSequence,
} from '../../src/symbols/sequence.ts';

/**
 * A small generator of 32-bit integers (xorshift, Marsaglia 2003), so that a sequence is known by
 * its seed.
 */
export function integers(seed: number): () => number {
  let state = (seed ^ 0x9e3779b9) | 1;
  return () => {
    state ^= state << 13;
    state ^= state >>> 17;
    state ^= state << 5;
    return state >>> 0;
  };
}

const STYLES = ['run', 'uniform', 'skewed', 'alternating', 'ascending', 'few'] as const;
type Style = (typeof STYLES)[number];

interface MessageShape {
  readonly style: Style;
  readonly length: number;
  readonly seed: number;
}

function fill(symbols: SymbolArray, from: number, shape: MessageShape, alphabetSize: number) {
  const next = integers(shape.seed);
  const first = next() % alphabetSize;
  const second = next() % alphabetSize;
  for (let i = 0; i < shape.length; i++) {
    let symbol = first;
    if (shape.style === 'uniform') symbol = next() % alphabetSize;
    else if (shape.style === 'skewed') symbol = Math.min(alphabetSize - 1, Math.clz32(next()));
    else if (shape.style === 'alternating') symbol = i % 2 === 0 ? first : second;
    else if (shape.style === 'ascending') symbol = (first + i) % alphabetSize;
    else if (shape.style === 'few') symbol = next() % 16 === 0 ? next() % alphabetSize : second;
    symbols[from + i] = symbol;
  }
}

function sequenceOf(alphabetSize: number, shapes: readonly MessageShape[]): SymbolSequence {
  const length = shapes.reduce((sum, shape) => sum + shape.length, 0);
  const symbols = newSymbolArray(alphabetSize, length);
  const messageEnds = new Uint32Array(shapes.length);
  let at = 0;
  for (const [i, shape] of shapes.entries()) {
    fill(symbols, at, shape, alphabetSize);
    at += shape.length;
    messageEnds[i] = at;
  }
  return { alphabetSize, symbols, messageEnds };
}

/** Drawn sequences: 0 to 8 messages of 0 to 120 symbols, now and then one of some thousand. */
export function sequences(alphabetSize: number): fc.Arbitrary<SymbolSequence> {
  const length = fc.oneof(
    { weight: 6, arbitrary: fc.nat({ max: 12 }) },
    { weight: 5, arbitrary: fc.nat({ max: 120 }) },
    { weight: 1, arbitrary: fc.nat({ max: 3000 }) },
  );
  const shape = fc.record({
    style: fc.constantFrom(...STYLES),
    length,
    seed: fc.integer({ min: 0, max: 0x7fffffff }),
  });
  return fc.array(shape, { maxLength: 8 }).map((shapes) => sequenceOf(alphabetSize, shapes));
}

/** The sequence with each message cut to a whole number of records. */
export function inRecords(sequence: SymbolSequence, recordSymbols: number): SymbolSequence {
  const { alphabetSize, messageEnds } = sequence;
  const symbols = newSymbolArray(alphabetSize, sequence.symbols.length);
  const ends = new Uint32Array(messageEnds.length);
  let at = 0;
  messageEnds.forEach((end, i) => {
    const from = i === 0 ? 0 : messageEnds[i - 1];
    const length = end - from - ((end - from) % recordSymbols);
    symbols.set(sequence.symbols.subarray(from, from + length), at);
    at += length;
    ends[i] = at;
  });
  return { alphabetSize, symbols: symbols.slice(0, at), messageEnds: ends };
}

/** The cases that break coders most often. */
export function degenerateSequences(alphabetSize: number): [string, SymbolSequence][] {
  const messages = (...shapes: [Style, number][]) =>
    sequenceOf(
      alphabetSize,
      shapes.map(([style, length], i) => ({ style, length, seed: 11 + i })),
    );
  return [
    ['no message', messages()],
    ['one empty message', messages(['run', 0])],
    ['empty messages only', messages(['run', 0], ['run', 0], ['run', 0])],
    ['one symbol', messages(['run', 1])],
    ['one symbol in each of two messages', messages(['run', 1], ['run', 1])],
    ['an empty message first and last', messages(['run', 0], ['uniform', 9], ['run', 0])],
    ['a long run', messages(['run', 5000])],
    ['a long run in each of two messages', messages(['run', 2000], ['run', 2000])],
    ['an alternation', messages(['alternating', 700], ['alternating', 701])],
    ['every symbol once', messages(['ascending', Math.min(alphabetSize, 1500)], ['run', 3])],
    ['uniform noise', messages(['uniform', 2500], ['uniform', 1])],
    ['skewed', messages(['skewed', 40], ['skewed', 2500], ['few', 333])],
  ];
}

/**
 * The sequence in chunks cut at `cuts` (symbol indices, in any order). An end at a chunk's edge
 * stands with its last symbol; ends of empty messages there stand in the earlier chunk, or in the
 * later one where `emptiesLater`.
 */
export function chunksOf(
  sequence: SymbolSequence,
  cuts: readonly number[],
  emptiesLater = false,
): SymbolChunk[] {
  const { alphabetSize, symbols, messageEnds } = sequence;
  const edges = [...cuts].sort((a, b) => a - b);
  edges.push(symbols.length);
  const chunks: SymbolChunk[] = [];
  let from = 0;
  let message = 0;
  for (const [i, to] of edges.entries()) {
    const ends: number[] = [];
    const last = i === edges.length - 1;
    while (message < messageEnds.length && messageEnds[message] <= to) {
      const empty = messageEnds[message] === (message === 0 ? 0 : messageEnds[message - 1]);
      if (!last && emptiesLater && empty && messageEnds[message] === to) break;
      ends.push(messageEnds[message++] - from);
    }
    const open = to > from && to > (message === 0 ? 0 : messageEnds[message - 1]);
    chunks.push({
      alphabetSize,
      symbols: symbols.subarray(from, to),
      messageEnds: Uint32Array.from(ends),
      ...(open
        ? { openSymbolCount: messageEnds[message] - (message === 0 ? 0 : messageEnds[message - 1]) }
        : {}),
    });
    from = to;
  }
  return chunks;
}
