import { BugError } from '../errors/errors.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import { copyOfRanks, rankSymbols } from './context-counts-ranks.ts';

/** Marks a place of the array that is not filled yet. */
const EMPTY = -1;

/** Most symbols a suffix array is made of. */
const MOST_SUFFIXES = 2 ** 30;

/**
 * The start positions of all suffixes of `symbols` in rising order; where one suffix begins another, the shorter is first.
 *
 * Cost: linear time; memory 4 bytes a symbol for the result and up to about 8 more while it is made, beside a copy of the
 * symbols as ranks.
 * Source: induced sorting: G. Nong, S. Zhang, W. H. Chan, "Two Efficient Algorithms for Linear Time Suffix Array
 * Construction", 2011.
 */
export function suffixArray(symbols: SymbolArray): Int32Array {
  if (symbols.length > MOST_SUFFIXES) {
    throw new BugError(`a suffix array of ${symbols.length} symbols was asked for`);
  }
  const ranked = rankSymbols(symbols);
  const order = new Int32Array(symbols.length);
  sortSuffixes(copyOfRanks(ranked, 0), ranked.distinct, order);
  return order;
}

type Text = SymbolArray | Int32Array;

/**
 * A suffix is *falling* where it is greater than the one that begins a symbol later, else *rising*; the last suffix is
 * falling, since the empty one is least. A *valley* is a rising suffix after a falling one: once the valleys are sorted,
 * one pass up and one pass down the array sort the rest.
 * @param text  ranks below `alphabetSize`, each of which occurs
 */
function sortSuffixes(text: Text, alphabetSize: number, order: Int32Array): void {
  const { length } = text;
  if (length < 2) {
    order.fill(0);
    return;
  }
  const rising = new Uint8Array(length);
  for (let i = length - 2; i >= 0; i--) {
    rising[i] = text[i] === text[i + 1] ? rising[i + 1] : text[i] < text[i + 1] ? 1 : 0;
  }
  const starts = new Int32Array(alphabetSize + 1);
  for (let i = 0; i < length; i++) starts[text[i] + 1]++;
  for (let c = 0; c < alphabetSize; c++) starts[c + 1] += starts[c];
  const places = new Int32Array(alphabetSize);

  let valleyCount = 0;
  for (let i = 1; i < length; i++) if (rising[i] > rising[i - 1]) valleyCount++;

  // First by their stretches only: from one valley up to and including the next.
  order.fill(EMPTY);
  placeEnds(starts, places);
  for (let i = length - 1; i > 0; i--) {
    if (rising[i] > rising[i - 1]) order[--places[text[i]]] = i;
  }
  induce(text, rising, starts, places, order);
  if (valleyCount > 1) {
    sortValleys(text, rising, valleyCount, order);
    // The sorted valleys stand at the front; from the last on, each moves to the end of its symbol's places.
    placeEnds(starts, places);
    for (let j = valleyCount - 1; j >= 0; j--) {
      const position = order[j];
      order[j] = EMPTY;
      order[--places[text[position]]] = position;
    }
    induce(text, rising, starts, places, order);
  }
}

function placeEnds(starts: Int32Array, places: Int32Array): void {
  for (let c = 0; c < places.length; c++) places[c] = starts[c + 1];
}

/** Sorts the falling suffixes from the valleys in place, then the rising ones from the falling. */
function induce(
  text: Text,
  rising: Uint8Array,
  starts: Int32Array,
  places: Int32Array,
  order: Int32Array,
): void {
  const last = text.length - 1;
  places.set(starts.subarray(0, places.length));
  order[places[text[last]]++] = last;
  for (let j = 0; j <= last; j++) {
    const before = order[j] - 1;
    if (before >= 0 && rising[before] === 0) order[places[text[before]]++] = before;
  }
  placeEnds(starts, places);
  for (let j = last; j >= 0; j--) {
    const before = order[j] - 1;
    if (before >= 0 && rising[before] === 1) order[--places[text[before]]] = before;
  }
}

/** Brings the valleys, sorted by their stretches within `order`, fully sorted to its front; the rest becomes empty. */
function sortValleys(text: Text, rising: Uint8Array, valleyCount: number, order: Int32Array): void {
  const { length } = text;
  let at = 0;
  for (let j = 0; j < length; j++) {
    const i = order[j];
    if (i > 0 && rising[i] > rising[i - 1]) order[at++] = i;
  }
  // No two valleys are neighbours, so half of a position names a place of its own behind the valleys.
  order.fill(EMPTY, valleyCount);
  let names = 0;
  let previous = -1;
  for (let j = 0; j < valleyCount; j++) {
    const i = order[j];
    if (previous < 0 || !sameStretch(text, rising, previous, i)) names++;
    order[valleyCount + (i >>> 1)] = names - 1;
    previous = i;
  }
  if (names < valleyCount) sortReduced(text, rising, names, valleyCount, order);
  order.fill(EMPTY, valleyCount);
}

/** Sorts the valleys as the suffixes of the text of their names. */
function sortReduced(
  text: Text,
  rising: Uint8Array,
  names: number,
  valleyCount: number,
  order: Int32Array,
): void {
  const reduced = new Int32Array(valleyCount);
  const valleys = new Int32Array(valleyCount);
  let found = 0;
  for (let i = 1; i < text.length; i++) {
    if (rising[i] <= rising[i - 1]) continue;
    reduced[found] = order[valleyCount + (i >>> 1)];
    valleys[found++] = i;
  }
  const sorted = order.subarray(0, valleyCount);
  sortSuffixes(reduced, names, sorted);
  for (let j = 0; j < valleyCount; j++) sorted[j] = valleys[sorted[j]];
}

/** Whether two different valleys have the same stretch; the one that meets the end of the text equals no other. */
function sameStretch(text: Text, rising: Uint8Array, a: number, b: number): boolean {
  const { length } = text;
  for (let d = 0; ; d++) {
    if (a + d === length || b + d === length) return false;
    if (text[a + d] !== text[b + d] || rising[a + d] !== rising[b + d]) return false;
    if (d > 0 && rising[a + d] > rising[a + d - 1] && rising[b + d] > rising[b + d - 1]) {
      return true;
    }
  }
}
