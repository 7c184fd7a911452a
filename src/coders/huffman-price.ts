import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Price, Setup } from './contract.ts';
import { SymbolCounts } from './huffman-counts.ts';
import { huffmanTables } from './huffman-tables.ts';
import type { Rational } from './parameters.ts';

/**
 * Σ c · log2(total / c) over the symbols seen: the shortest code length with one fixed
 * distribution.
 */
export function empiricalBits(counts: SymbolCounts): number {
  let bits = 0;
  for (let i = 0; i < counts.seenCount; i++) {
    const count = counts.counts[counts.seen[i]];
    bits += count * Math.log2(counts.total / count);
  }
  return bits;
}

/**
 * Price of `huffman`: the distribution behind the words, before their lengths are rounded to whole
 * bits. `shipped`: (count · q + p) / (n · q + m · p) of the train counts; `sent`: the frequencies
 * of what each table was fitted to. fit: the empirical order-0 code length of the whole sequence.
 */
export function priceHuffman(sequence: SymbolSequence, setup: Setup, added: Rational): Price {
  const { symbols, messageEnds } = sequence;
  const messageIdealBits = new Float64Array(messageEnds.length);
  const whole = new SymbolCounts(setup.alphabetSize);
  whole.add(symbols, 0, symbols.length);
  const fit = { bits: empiricalBits(whole), of: { order: 0 } };

  if (setup.policy === 'sent' && setup.reset === 'message') {
    const counts = new SymbolCounts(setup.alphabetSize);
    let from = 0;
    for (let i = 0; i < messageEnds.length; i++) {
      counts.clear();
      counts.add(symbols, from, messageEnds[i]);
      messageIdealBits[i] = empiricalBits(counts);
      from = messageEnds[i];
    }
  } else {
    const costs =
      setup.policy === 'shipped'
        ? smoothedCosts(huffmanTables(setup).counts, added)
        : empiricalCosts(whole.counts);
    let from = 0;
    for (let i = 0; i < messageEnds.length; i++) {
      let bits = 0;
      for (let at = from; at < messageEnds[i]; at++) bits += costs[symbols[at]];
      messageIdealBits[i] = bits;
      from = messageEnds[i];
    }
  }
  return {
    idealBits: messageIdealBits.reduce((sum, bits) => sum + bits, 0),
    messageIdealBits,
    fit,
  };
}

/** −log2 of the smoothed probability, by symbol. */
export function smoothedCosts(counts: Float64Array, added: Rational): Float64Array {
  const total = counts.reduce((sum, count) => sum + count, 0) * added.q + counts.length * added.p;
  return counts.map((count) => Math.log2(total / (count * added.q + added.p)));
}

/** −log2 of the share of all counts, by symbol; 0 where there are none. */
export function empiricalCosts(counts: Float64Array): Float64Array {
  const total = counts.reduce((sum, count) => sum + count, 0);
  return counts.map((count) => (count === 0 ? 0 : Math.log2(total / count)));
}
