import type { SymbolSequence } from '../symbols/sequence.ts';
import { NgramCutter, NgramIndex, ngramSpace } from './block-huffman-ngrams.ts';
import { type BlockTables, blockTables, escapeWeight, TAIL_ADDED } from './block-huffman-tables.ts';
import type { FitClass, Price, Setup } from './contract.ts';
import { SymbolCounts } from './huffman-counts.ts';
import { empiricalBits } from './huffman-price.ts';

/** Counts of n-grams and tail symbols over one message or many. */
class BlockCounts {
  readonly index: NgramIndex;
  readonly tails: SymbolCounts;
  readonly #cutter: NgramCutter;

  constructor(n: number, alphabetSize: number) {
    this.index = new NgramIndex(ngramSpace(alphabetSize, n));
    this.tails = new SymbolCounts(alphabetSize);
    this.#cutter = new NgramCutter(n, alphabetSize, (keys, count) => {
      for (let i = 0; i < count; i++) this.index.add(keys[i]);
    });
  }

  addMessage(sequence: SymbolSequence, from: number, to: number): void {
    this.#cutter.take(sequence.symbols, from, to);
    this.#cutter.flush();
    this.tails.add(this.#cutter.tail, 0, this.#cutter.tailCount);
    this.#cutter.tailCount = 0;
  }

  clear(): void {
    this.index.clear();
    this.tails.clear();
  }

  /** Shortest code length with one distribution for the blocks and one for the tails. */
  empiricalBits(): number {
    const { counts, size, total } = this.index;
    let bits = empiricalBits(this.tails);
    for (let i = 0; i < size; i++) bits += counts[i] * Math.log2(total / counts[i]);
    return bits;
  }
}

/** −log2 of the probabilities of a fixed pair of tables. */
interface BlockCosts {
  ofKey(key: number): number;
  readonly ofTail: Float64Array;
}

function shippedCosts(tables: BlockTables, alphabetSize: number): BlockCosts {
  const { keys, counts, tailCounts, n } = tables;
  const index = new NgramIndex(ngramSpace(alphabetSize, n));
  const escapeCount = escapeWeight(tables);
  const total = counts.reduce((sum, count) => sum + count, escapeCount);
  for (let i = 0; i < keys.length; i++) index.add(keys[i]);
  const escapeBits =
    escapeCount === 0 ? 0 : Math.log2(total / escapeCount) + n * Math.log2(alphabetSize);
  const { p, q } = TAIL_ADDED;
  const tailTotal = tailCounts.reduce((sum, count) => sum + count * q + p, 0);
  return {
    ofKey(key) {
      const entry = index.find(key);
      return entry < 0 ? escapeBits : Math.log2(total / counts[entry]);
    },
    ofTail: tailCounts.map((count) => Math.log2(tailTotal / (count * q + p))),
  };
}

function fittedCosts(whole: BlockCounts): BlockCosts {
  const { index, tails } = whole;
  return {
    ofKey: (key) => Math.log2(index.total / index.counts[index.find(key)]),
    ofTail: tails.counts.map((count) => (count === 0 ? 0 : Math.log2(tails.total / count))),
  };
}

/**
 * Price of `block-huffman`: the distributions behind its words. `shipped`: count / (total with
 * escape), an n-gram never trained at p(escape) × 1/mⁿ; `sent`: the frequencies of what each table
 * was fitted to. fit: the empirical code length of the non-overlapping n-grams, with that of the
 * tails beside it.
 */
export function priceBlocks(sequence: SymbolSequence, setup: Setup, n: number): Price {
  const { messageEnds } = sequence;
  const { alphabetSize } = setup;
  const messageIdealBits = new Float64Array(messageEnds.length);
  const whole = new BlockCounts(n, alphabetSize);
  let from = 0;
  for (const end of messageEnds) {
    whole.addMessage(sequence, from, end);
    from = end;
  }
  const fit = { bits: whole.empiricalBits(), of: { block: n } as FitClass };

  from = 0;
  if (setup.policy === 'sent' && setup.reset === 'message') {
    const counts = new BlockCounts(n, alphabetSize);
    for (const [i, end] of messageEnds.entries()) {
      counts.clear();
      counts.addMessage(sequence, from, end);
      messageIdealBits[i] = counts.empiricalBits();
      from = end;
    }
  } else {
    const costs =
      setup.policy === 'shipped'
        ? shippedCosts(blockTables(setup, n), alphabetSize)
        : fittedCosts(whole);
    let bits = 0;
    const cutter = new NgramCutter(n, alphabetSize, (keys, count) => {
      for (let i = 0; i < count; i++) bits += costs.ofKey(keys[i]);
    });
    for (const [i, end] of messageEnds.entries()) {
      bits = 0;
      cutter.take(sequence.symbols, from, end);
      cutter.flush();
      for (let j = 0; j < cutter.tailCount; j++) bits += costs.ofTail[cutter.tail[j]];
      cutter.tailCount = 0;
      messageIdealBits[i] = bits;
      from = end;
    }
  }
  return {
    idealBits: messageIdealBits.reduce((sum, bits) => sum + bits, 0),
    messageIdealBits,
    fit,
  };
}
