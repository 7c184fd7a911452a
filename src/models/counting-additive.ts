import type { SymbolArray } from '../symbols/sequence.ts';
import type { AddedCount, AdditiveModel } from './additive-model.ts';
import { NODE_FIRST, NODE_SECOND, NODE_SYMBOL, NODE_WORDS } from './context-tree.ts';
import { CountingContexts } from './counting-contexts.ts';
import { CountingRuns } from './counting-runs.ts';
import { CountingSums } from './counting-sums.ts';
import type { OperationTally } from './counting-tally.ts';
import type { IntervalSink } from './interval.ts';
import type { PositionSums } from './position-sums.ts';
import { HAS_RUN, type SymbolRuns } from './symbol-runs.ts';

const isPowerOfTwo = (value: number): boolean => Number.isInteger(Math.log2(value));

/**
 * Takes the steps of an {@link AdditiveModel}'s encoder and decoder together and counts what each reads and decides, without the
 * loop's shortcut for totals that are far from their bound. The same intervals come out, which a test holds it to. What the stage
 * does is counted by the sink; contexts, runs and sums by classes of their own.
 *
 * Beside those. Products by p and q, where these are no powers of two, are multiplies. A context: its two words and whether it has a
 * run, 3 reads and 1 branch. With a run its length; the encoder tests each entry up to the symbol's for the end and the symbol and
 * reads it twice, for a symbol not yet seen it walks the run once more; the decoder tests its target against the unseen symbols'
 * interval and then weight by weight, an unseen one's rank is brought to a symbol by walks over the run. In the end whether
 * the total can be too large.
 */
export class CountingAdditive {
  readonly #alphabetSize: number;
  readonly #order: number;
  readonly #added: AddedCount;
  readonly #halveAt: number;
  readonly #runs: SymbolRuns;
  readonly #counted: CountingRuns;
  readonly #contexts: CountingContexts;
  /** Order 0 only. */
  readonly #positionSums: PositionSums | undefined;
  readonly #sumSteps: CountingSums;
  readonly #encoder: OperationTally;
  readonly #decoder: OperationTally;
  /** Multiplies that a product by p, and by q, takes. */
  readonly #timesP: number;
  readonly #timesQ: number;

  /**
   * @param model  the state to start with, which is copied
   * @param slots  as CountingContexts
   */
  constructor(
    model: AdditiveModel,
    alphabetSize: number,
    order: number,
    added: AddedCount,
    halveAt: number,
    slots: number,
    encoder: OperationTally,
    decoder: OperationTally,
  ) {
    const { runs, sums } = model.learned();
    this.#alphabetSize = alphabetSize;
    this.#order = order;
    this.#added = added;
    this.#halveAt = halveAt;
    this.#runs = runs;
    this.#positionSums = sums;
    this.#encoder = encoder;
    this.#decoder = decoder;
    this.#timesP = isPowerOfTwo(added.p) ? 0 : 1;
    this.#timesQ = isPowerOfTwo(added.q) ? 0 : 1;
    runs.tree.start();
    this.#counted = new CountingRuns(runs, encoder, decoder);
    this.#contexts = new CountingContexts(runs.tree, slots, encoder, decoder);
    this.#sumSteps = new CountingSums(alphabetSize);
  }

  /** Makes the present counts the state that {@link reset} returns to. */
  markResetState(): void {
    this.#runs.mark();
    this.#positionSums?.mark();
    this.#contexts.mark();
    this.#runs.tree.start();
  }

  reset(): void {
    this.#runs.restore();
    this.#positionSums?.restore();
    this.#contexts.restore();
    this.#runs.tree.start();
  }

  /** Words that the runs take now, and positions met. */
  get size(): { readonly runWords: number; readonly positions: number } {
    return { runWords: this.#runs.runWords, positions: this.#positionSums?.count ?? 0 };
  }

  /** Codes `symbols[from … to − 1]` and closes each at both ends. */
  code(symbols: SymbolArray, from: number, to: number, sink: IntervalSink): void {
    for (let i = from; i < to; i++) {
      const symbol = symbols[i];
      if (this.#positionSums !== undefined) this.#codeEmpty(this.#positionSums, symbol, sink);
      else this.#codeAtOrder(symbol, sink);
      this.#contexts.advance(symbol);
      this.#encoder.close();
      this.#decoder.close();
    }
  }

  #count(multiplies: number, tableReads: number, branches: number): void {
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    encoder.multiplies += multiplies;
    decoder.multiplies += multiplies;
    encoder.tableReads += tableReads;
    decoder.tableReads += tableReads;
    encoder.branches += branches;
    decoder.branches += branches;
  }

  #codeAtOrder(symbol: number, sink: IntervalSink): void {
    const runs = this.#runs;
    const { words, contexts } = runs.tree;
    const { p, q } = this.#added;
    const node = contexts[this.#order];
    const at = node * NODE_WORDS;
    const first = words[at + NODE_FIRST];
    const total = q * words[at + NODE_SECOND] + p * this.#alphabetSize;
    this.#count(this.#timesQ, 3, 1);
    // Where the unseen begin, and whether the target lies there.
    this.#decoder.multiplies += this.#timesQ + this.#timesP;
    this.#decoder.branches += 1;
    if (words[at + NODE_SYMBOL] & HAS_RUN) this.#codeInRun(node, first, symbol, total, sink);
    else this.#codeAlone(node, first, symbol, total, sink);
    // Whether the total can be too large.
    this.#count(0, 0, 1);
    if (total + q > this.#halveAt) this.#settle(node);
  }

  #codeInRun(node: number, run: number, symbol: number, total: number, sink: IntervalSink): void {
    const runs = this.#runs;
    const { pool } = runs;
    const { p, q } = this.#added;
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    const timesP = this.#timesP;
    const timesQ = this.#timesQ;
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    const distinct = pool[run];
    const end = run + distinct;
    let counts = 0;
    let position = run + 1;
    while (position <= end && (pool[position] & mask) !== symbol) {
      counts += pool[position++] >>> bits;
    }
    const passed = position - run - 1;
    this.#count(0, 1, 0);
    // Each entry passed: read twice, two tests.
    encoder.tableReads += 2 * passed;
    encoder.branches += 2 * passed;
    // Lower end; whether the symbol was found.
    encoder.multiplies += timesQ + timesP;
    encoder.branches += 1;
    // Whether there is a run, once more.
    decoder.branches += 1;
    if (position <= end) {
      encoder.tableReads += 2;
      encoder.branches += 2;
      encoder.multiplies += timesQ;
      decoder.tableReads += passed + 1 + 1;
      decoder.multiplies += (passed + 1) * timesQ;
      decoder.branches += passed + 1;
      sink.put(q * counts + p * passed, q * (pool[position] >>> bits) + p, total);
      this.#counted.increment(node, position);
      return;
    }
    let below = 0;
    for (let j = run + 1; j <= end; j++) if ((pool[j] & mask) < symbol) below++;
    encoder.tableReads += distinct;
    encoder.branches += 1 + 2 * distinct + 1;
    const rank = symbol - below;
    this.#rankToSymbol(run, mask, rank);
    sink.put(q * counts + p * (distinct + rank), p, total);
    this.#counted.append(node, symbol);
  }

  /** The decoder's way from a rank to the unseen symbol of a run: walks until one changes nothing. */
  #rankToSymbol(run: number, mask: number, rank: number): void {
    const { pool } = this.#runs;
    const decoder = this.#decoder;
    const distinct = pool[run];
    decoder.divides += this.#timesP;
    decoder.multiplies += this.#timesP;
    decoder.tableReads += 1;
    let symbol = rank;
    for (let shift = 0; ; ) {
      let upTo = 0;
      for (let i = run + 1; i <= run + distinct; i++) if ((pool[i] & mask) <= symbol) upTo++;
      decoder.tableReads += distinct;
      decoder.branches += 2 * distinct + 1 + 1;
      if (upTo === shift) return;
      shift = upTo;
      symbol = rank + shift;
    }
  }

  /** In a context with one symbol, or none. */
  #codeAlone(node: number, entry: number, symbol: number, total: number, sink: IntervalSink): void {
    const { symbolBits } = this.#runs;
    const { p, q } = this.#added;
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    const count = entry >>> symbolBits;
    const only = entry & (2 ** symbolBits - 1);
    const isEmpty = entry === 0;
    // Whether there is any; whether there is a run, once more.
    this.#count(0, 0, 1);
    decoder.branches += 1;
    if (!isEmpty) {
      encoder.branches += 1;
      encoder.multiplies += this.#timesQ;
    }
    if (!isEmpty && only === symbol) {
      decoder.multiplies += this.#timesQ;
      if (this.#alphabetSize > 1) sink.put(0, q * count + p, total);
      this.#counted.incrementOnly(node);
      return;
    }
    const isAbove = !isEmpty && symbol > only;
    const rank = isAbove ? symbol - 1 : symbol;
    encoder.multiplies += this.#timesP;
    if (!isEmpty) encoder.branches += 1;
    decoder.divides += this.#timesP;
    decoder.multiplies += this.#timesP;
    decoder.branches += isEmpty ? 1 : 2;
    const low = q * count + p * (isEmpty ? rank : rank + 1);
    if (this.#alphabetSize > 1) sink.put(low, p, total);
    this.#counted.append(node, symbol);
  }

  #settle(node: number): void {
    const { p, q } = this.#added;
    for (;;) {
      const sum = this.#counted.sumOf(node);
      this.#count(this.#timesQ, 0, 1);
      if (q * sum + p * this.#alphabetSize <= this.#halveAt) return;
      this.#counted.halve(node);
    }
  }

  #codeEmpty(positionSums: PositionSums, symbol: number, sink: IntervalSink): void {
    const { p, q } = this.#added;
    const steps = this.#sumSteps;
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    const base = p * this.#alphabetSize;
    const sums = positionSums.at(this.#runs.tree.contexts[0]);
    const total = q * sums.sum + base;
    const weight = q * sums.counts[symbol] + p;
    if (this.#alphabetSize > 1) {
      // Total, weight and lower end; the decoder's search weighs a sum at each level.
      this.#count(3 * this.#timesQ + this.#timesP, 1, 0);
      steps.search(decoder);
      decoder.multiplies += steps.levels * this.#timesQ;
      steps.increment(sums, symbol, encoder);
      steps.increment(sums, symbol, decoder);
    }
    const low = q * sums.increment(symbol) + p * symbol;
    if (this.#alphabetSize > 1) sink.put(low, weight, total);
    for (;;) {
      this.#count(this.#timesQ, 0, 1);
      if (q * sums.sum + base <= this.#halveAt) return;
      steps.halve(sums, encoder);
      steps.halve(sums, decoder);
      sums.halve();
    }
  }
}
