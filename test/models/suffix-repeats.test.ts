import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { suffixArray } from '../../src/models/suffix-array.ts';
import { sortedSuffixes } from '../../src/models/suffix-common.ts';
import { Repeats } from '../../src/models/suffix-repeats.ts';
import type { SymbolArray } from '../../src/symbols/sequence.ts';

/** Text of few and of many different symbols, with stretches that come again: what random text hardly has. */
const pieces = (largest: number) =>
  fc
    .array(fc.tuple(fc.array(fc.nat(largest), { maxLength: 9 }), fc.integer({ min: 1, max: 7 })), {
      maxLength: 8,
    })
    .map((list) =>
      list.flatMap(([piece, times]) => new Array(times).fill(piece).flat() as number[]),
    );
const texts = fc.oneof(
  ...[0, 1, 2, 3, 255].map((largest) => pieces(largest).map((t) => Uint8Array.from(t))),
  pieces(0xffff).map((t) => Uint16Array.from(t)),
  pieces(2 ** 32 - 1).map((t) => Uint32Array.from(t)),
);

function compareSuffixes(text: SymbolArray, a: number, b: number): number {
  for (let d = 0; a + d < text.length && b + d < text.length; d++) {
    if (text[a + d] !== text[b + d]) return text[a + d] - text[b + d];
  }
  return b - a;
}

/** Longest match of position i that begins at `earlier`, ends before `end`. */
function matchAt(text: SymbolArray, i: number, earlier: number, end: number): number {
  let length = 0;
  while (
    i + length < text.length &&
    earlier + length < end &&
    text[earlier + length] === text[i + length]
  ) {
    length++;
  }
  return length;
}

function longestMatch(text: SymbolArray, i: number, mayRunOn: boolean): number {
  let longest = 0;
  for (let j = 0; j < i; j++) {
    longest = Math.max(longest, matchAt(text, i, j, mayRunOn ? text.length : i));
  }
  return longest;
}

function componentsByDefinition(text: SymbolArray): number {
  let components = 0;
  for (let i = 0; i < text.length; i += longestMatch(text, i, true) + 1) components++;
  return components;
}

/** Fibonacci's word: full of repeats that overlap, of many periods. */
function fibonacciWord(length: number): Uint8Array {
  let [a, b] = [[0], [0, 1]];
  while (b.length < length) [a, b] = [b, [...b, ...a]];
  return Uint8Array.from(b.slice(0, length));
}

const special: [string, SymbolArray][] = [
  ['nothing', new Uint8Array(0)],
  ['one symbol', Uint8Array.of(7)],
  ['all equal', new Uint8Array(300).fill(3)],
  ['all different', Uint16Array.from({ length: 300 }, (_, i) => 65_535 - i)],
  ['alternating', Uint8Array.from({ length: 301 }, (_, i) => i % 2)],
  ['Fibonacci', fibonacciWord(400)],
  ['32-bit symbols', Uint32Array.of(2 ** 32 - 1, 0, 2 ** 32 - 1, 0, 5)],
];

const repeatsOf = (text: SymbolArray): Repeats => new Repeats(sortedSuffixes(text));

describe('suffixArray', () => {
  const check = (text: SymbolArray) => {
    const expected = Array.from(text, (_, i) => i).sort((a, b) => compareSuffixes(text, a, b));
    expect([...suffixArray(text)]).toEqual(expected);
  };

  it('equals a sort that compares suffixes', () => {
    fc.assert(fc.property(texts, check), { numRuns: 1500 });
  });

  it.each(special)('of %s', (_, text) => check(text));
});

describe('Repeats', () => {
  const check = (text: SymbolArray) => {
    const repeats = repeatsOf(text);
    const expected = Array.from(text, (_, i) => longestMatch(text, i, false));
    expect([...repeats.pastMatches()]).toEqual(expected);
    expect(repeats.componentCount()).toBe(componentsByDefinition(text));
  };

  it('finds the matches and components that a search finds', () => {
    fc.assert(fc.property(texts, check), { numRuns: 1500 });
  });

  it.each(special)('of %s', (_, text) => check(text));

  it('takes a million equal or alternating symbols, and a long Fibonacci word, in its stride', () => {
    const n = 2 ** 20;
    const half = (i: number): number => Math.min(i, n - i);
    const equal = repeatsOf(new Uint8Array(n)).pastMatches();
    expect(equal.every((length, i) => length === half(i))).toBe(true);
    const alternating = repeatsOf(Uint8Array.from({ length: n }, (_, i) => i % 2)).pastMatches();
    // A match begins an even number of symbols earlier.
    expect(alternating.every((length, i) => length === Math.min(i - (i % 2), n - i))).toBe(true);
    expect(repeatsOf(fibonacciWord(n)).pastMatches()).toHaveLength(n);
  });
});
