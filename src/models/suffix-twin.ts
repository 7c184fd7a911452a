import { SeededGenerator } from '../statistics/generator.ts';
import { newSymbolArray, type SymbolArray } from '../symbols/sequence.ts';
import type { SortedSuffixes } from './suffix-common.ts';

/**
 * A sequence of the same length as `symbols` drawn from the Markov chain of order k whose probabilities are the frequencies
 * seen in them: alike in all that order k can tell, and without any other structure. Its entropy rate is their plug-in
 * entropy of order k, but for the k positions at the start.
 *
 * Each symbol is copied from behind a place where the last k symbols occur, every such place being as likely; where the
 * data end there, drawing goes on from behind any k symbols.
 * @param suffixes  of `symbols`
 * @param order     k ≥ 0
 * Cost: linear time; 8 bytes a symbol.
 */
export function markovTwin(
  symbols: SymbolArray,
  suffixes: SortedSuffixes,
  order: number,
  seed: number,
): SymbolArray {
  const { length } = symbols;
  const twin = newSymbolArray(2 ** (8 * symbols.BYTES_PER_ELEMENT), length);
  const generator = new SeededGenerator(seed);
  const places = length - order;
  if (places < 1) {
    twin.set(symbols);
    return twin;
  }
  const { groupOf, starts } = groupByContext(suffixes, order);
  let context = Math.floor(generator.real() * places);
  for (let i = 0; i < length; i++) {
    const start = starts[groupOf[context]];
    const size = starts[groupOf[context] + 1] - start;
    let place = suffixes.order[start + Math.floor(generator.real() * size)];
    if (place >= places) place = Math.floor(generator.real() * places);
    twin[i] = symbols[place + order];
    context = place + 1;
    if (context >= places) context = Math.floor(generator.real() * places);
  }
  return twin;
}

/** Positions followed by the same `order` symbols form a group: neighbours among the sorted suffixes. */
function groupByContext(
  { order: sorted, common }: SortedSuffixes,
  order: number,
): { readonly groupOf: Int32Array; readonly starts: Int32Array } {
  const groupOf = new Int32Array(sorted.length);
  const starts = new Int32Array(sorted.length + 1);
  let groups = 0;
  for (let j = 0; j < sorted.length; j++) {
    if (j === 0 || common[sorted[j]] < order) starts[groups++] = j;
    groupOf[sorted[j]] = groups - 1;
  }
  starts[groups] = sorted.length;
  return { groupOf, starts };
}
