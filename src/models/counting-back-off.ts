import type { SymbolArray } from '../symbols/sequence.ts';
import type { BackOffModel } from './back-off-model.ts';
import { NODE_FIRST, NODE_SECOND, NODE_SYMBOL, NODE_WORDS } from './context-tree.ts';
import { CountingContexts } from './counting-contexts.ts';
import { CountingRuns } from './counting-runs.ts';
import { CountingSums } from './counting-sums.ts';
import type { OperationTally } from './counting-tally.ts';
import type { IntervalSink } from './interval.ts';
import type { PositionSums } from './position-sums.ts';
import { HAS_RUN, type SymbolRuns } from './symbol-runs.ts';
import type { SymbolSums } from './symbol-sums.ts';

/**
 * Takes the steps of a {@link BackOffModel}'s encoder and decoder together and counts what each reads and decides: the general
 * steps, without the loops that shorten the commonest case. The same intervals come out, which a test holds it to. What the
 * stage does is counted by the sink; contexts, runs and sums by classes of their own.
 *
 * Beside those. The longest context with anything: its sum and a test for each order. A context: its two words and whether it
 * has a run, 3 reads and 1 branch. In it the encoder, for each entry that it passes, tests the end and the symbol and reads the
 * entry twice, the one found too; the decoder tests its target against the sum and then each count, read once. A shorter context: 2 reads and
 * 2 branches; each entry is read and tested for its end and its stamp (2 reads, 2 branches), one not excluded is read again, and
 * at the encoder compared. Then whether there was any, whether the escape is certain, and what was found; the decoder walks to its
 * target over entries and stamps, and after an escape over all once more.
 */
export class CountingBackOff {
  readonly #alphabetSize: number;
  readonly #order: number;
  readonly #halveAt: number;
  readonly #runs: SymbolRuns;
  readonly #counted: CountingRuns;
  readonly #contexts: CountingContexts;
  readonly #positionSums: PositionSums;
  readonly #sumSteps: CountingSums;
  readonly #encoder: OperationTally;
  readonly #decoder: OperationTally;
  #sums: SymbolSums;
  readonly #isExcluded: Uint8Array;
  readonly #excluded: Uint32Array;
  #excludedCount = 0;

  /**
   * @param model  the state to start with, which is copied
   * @param slots  as CountingContexts
   */
  constructor(
    model: BackOffModel,
    alphabetSize: number,
    order: number,
    halveAt: number,
    slots: number,
    encoder: OperationTally,
    decoder: OperationTally,
  ) {
    const { runs, sums } = model.learned();
    this.#alphabetSize = alphabetSize;
    this.#order = order;
    this.#halveAt = halveAt;
    this.#runs = runs;
    this.#positionSums = sums;
    this.#encoder = encoder;
    this.#decoder = decoder;
    runs.tree.start();
    this.#counted = new CountingRuns(runs, encoder, decoder);
    this.#contexts = new CountingContexts(runs.tree, slots, encoder, decoder);
    this.#sumSteps = new CountingSums(alphabetSize);
    this.#sums = sums.at(runs.tree.contexts[0]);
    this.#isExcluded = new Uint8Array(alphabetSize);
    this.#excluded = new Uint32Array(alphabetSize);
  }

  /** Makes the present counts the state that {@link reset} returns to. */
  markResetState(): void {
    this.#runs.mark();
    this.#positionSums.mark();
    this.#contexts.mark();
    this.#startContexts();
  }

  reset(): void {
    this.#runs.restore();
    this.#positionSums.restore();
    this.#contexts.restore();
    this.#startContexts();
  }

  #startContexts(): void {
    this.#runs.tree.start();
    this.#sums = this.#positionSums.at(this.#runs.tree.contexts[0]);
  }

  /** Words that the runs take now, and positions met. */
  get size(): { readonly runWords: number; readonly positions: number } {
    return { runWords: this.#runs.runWords, positions: this.#positionSums.count };
  }

  /** Codes `symbols[from … to − 1]` and closes each at both ends. */
  code(symbols: SymbolArray, from: number, to: number, sink: IntervalSink): void {
    const { contexts } = this.#runs.tree;
    for (let i = from; i < to; i++) {
      const symbol = symbols[i];
      this.#codeAny(symbol, sink);
      this.#clearExclusion();
      this.#contexts.advance(symbol);
      this.#sums = this.#positionSums.at(contexts[0]);
      this.#encoder.close();
      this.#decoder.close();
    }
  }

  #count(tableReads: number, branches: number): void {
    this.#encoder.tableReads += tableReads;
    this.#encoder.branches += branches;
    this.#decoder.tableReads += tableReads;
    this.#decoder.branches += branches;
  }

  /** By a new stamp, so that it takes nothing. */
  #clearExclusion(): void {
    for (let i = 0; i < this.#excludedCount; i++) this.#isExcluded[this.#excluded[i]] = 0;
    this.#excludedCount = 0;
  }

  #exclude(symbol: number): void {
    this.#isExcluded[symbol] = 1;
    this.#excluded[this.#excludedCount++] = symbol;
  }

  #codeAny(symbol: number, sink: IntervalSink): void {
    const runs = this.#runs;
    const { words, contexts } = runs.tree;
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    let order = this.#order;
    for (; order > 0; order--) {
      this.#count(1, 1);
      if (words[contexts[order] * NODE_WORDS + NODE_SECOND] > 0) break;
    }
    if (order === 0) {
      this.#codeBelowRuns(symbol, sink);
      return;
    }
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    const node = contexts[order];
    const at = node * NODE_WORDS;
    const first = words[at + NODE_FIRST];
    const sum = words[at + NODE_SECOND];
    this.#count(3, 1);
    if (!(words[at + NODE_SYMBOL] & HAS_RUN)) {
      const only = first & mask;
      this.#count(0, 1);
      if (only === symbol) {
        if (this.#alphabetSize > 1) sink.put(0, sum, sum + 1);
        this.#counted.incrementOnly(node);
        this.#settle(node, 1);
        this.#appendAbove(order, symbol);
        return;
      }
      sink.put(sum, 1, sum + 1);
      this.#exclude(only);
    } else {
      const { pool } = runs;
      const distinct = pool[first];
      const end = first + distinct;
      const total = distinct === this.#alphabetSize ? sum : sum + distinct;
      // Number of entries; whether all symbols are among them. The decoder: seen or escaped.
      this.#count(1, 1);
      decoder.branches += 1;
      let low = 0;
      for (let position = first + 1; position <= end; position++) {
        const other = pool[position] & mask;
        const count = pool[position] >>> bits;
        encoder.tableReads += 2;
        encoder.branches += 2;
        if (other === symbol) {
          // Each count up to its own, then the symbol.
          const passed = position - first;
          decoder.tableReads += passed + 1;
          decoder.branches += passed;
          sink.put(low, count, total);
          this.#counted.increment(node, position);
          this.#settle(node, distinct);
          this.#appendAbove(order, symbol);
          return;
        }
        low += count;
        this.#exclude(other);
      }
      encoder.branches += 1;
      decoder.tableReads += distinct;
      decoder.branches += distinct + 1;
      sink.put(sum, distinct, total);
    }
    this.#codeEscaped(order - 1, symbol, sink);
  }

  #codeEscaped(from: number, symbol: number, sink: IntervalSink): void {
    const runs = this.#runs;
    const { words, contexts } = runs.tree;
    const { pool } = runs;
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    for (let order = from; order > 0; order--) {
      const node = contexts[order];
      const at = node * NODE_WORDS;
      this.#count(2, 2);
      if (!(words[at + NODE_SYMBOL] & HAS_RUN)) continue;
      const run = words[at + NODE_FIRST];
      const distinct = pool[run];
      let sum = 0;
      let low = 0;
      let frequency = 0;
      let found = 0;
      // The decoder's walk to its target: entries passed, those among them that are not excluded.
      let passed = 0;
      let fresh = 0;
      for (let position = run + 1; position <= run + distinct; position++) {
        const other = pool[position] & mask;
        if (this.#isExcluded[other] === 1) continue;
        const count = pool[position] >>> bits;
        fresh++;
        if (other === symbol) {
          low = sum;
          frequency = count;
          found = position;
          passed = position - run;
          decoder.branches += fresh;
          decoder.tableReads += fresh;
        }
        sum += count;
        this.#exclude(other);
      }
      // Number of entries; then each entry and stamp, the loop's end, whether there was any.
      this.#count(1 + 2 * distinct + fresh, 2 * distinct + 2);
      encoder.branches += fresh;
      if (fresh === 0) continue;
      const hasAll = this.#excludedCount === this.#alphabetSize;
      const total = hasAll ? sum : sum + distinct;
      this.#count(0, 1);
      encoder.branches += 1;
      const isCertain = fresh === 1 && hasAll;
      decoder.branches += 1 + (fresh === 1 ? 1 : 0) + 1 + 1;
      if (found !== 0) {
        encoder.branches += 1;
        decoder.tableReads += 2 * passed + 1;
        decoder.branches += passed + 1;
        if (!isCertain) sink.put(low, frequency, total);
        this.#counted.increment(node, found);
        this.#settle(node, distinct);
        this.#appendAbove(order, symbol);
        return;
      }
      decoder.tableReads += 2 * distinct;
      decoder.branches += 2 * distinct + 1;
      sink.put(sum, distinct, total);
    }
    this.#codeBelowRuns(symbol, sink);
  }

  #codeBelowRuns(symbol: number, sink: IntervalSink): void {
    const sums = this.#sums;
    const steps = this.#sumSteps;
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    const { distinct } = sums;
    const excludedCount = this.#excludedCount;
    // Whether the context has anything new.
    this.#count(0, 1);
    if (distinct > excludedCount) {
      let sum = sums.sum;
      let excludedBelow = 0;
      for (let i = 0; i < excludedCount; i++) {
        const count = sums.counts[this.#excluded[i]];
        sum -= count;
        if (this.#excluded[i] < symbol) excludedBelow += count;
      }
      // Encoder, an excluded symbol: it, its count, it again; the loop, whether it lies below. Decoder: it and its count twice,
      // for taking out and for putting back, with a walk each.
      encoder.tableReads += 3 * excludedCount;
      encoder.branches += 2 * excludedCount + 1;
      decoder.tableReads += 2 * excludedCount * (3 + steps.levels);
      decoder.branches += 2 * (excludedCount + 1);
      const total = distinct === this.#alphabetSize ? sum : sum + distinct;
      const isSeen = sums.hasSeen(symbol);
      // Whether all symbols are seen. Encoder: whether this one is. Decoder: whether it is the last there can be, what the target says,
      // twice.
      this.#count(0, 1);
      encoder.tableReads += 1;
      encoder.branches += 1;
      const hasAll = distinct === this.#alphabetSize;
      decoder.branches += 1 + (hasAll ? 1 : 0) + 1 + 3;
      if (isSeen) {
        const frequency = sums.counts[symbol];
        encoder.tableReads += 1;
        encoder.branches += 1;
        steps.search(decoder);
        steps.sum(decoder);
        decoder.branches += 1;
        if (frequency < total) {
          decoder.tableReads += 1;
          sink.put(sums.sumBelow(symbol) - excludedBelow, frequency, total);
        }
        this.#countEmpty(symbol);
        this.#appendAbove(0, symbol);
        return;
      }
      sink.put(sum, distinct, total);
    }
    const left = this.#alphabetSize - distinct;
    this.#count(0, 1);
    if (left > 1) {
      steps.sum(encoder);
      sink.put(symbol - sums.seenBelow(symbol), 1, left);
    }
    steps.search(decoder);
    this.#countEmpty(symbol);
    this.#appendAbove(0, symbol);
  }

  /** Counts a symbol in the empty context; whether its total is too large, and if so whether halving helps. */
  #countEmpty(symbol: number): void {
    const sums = this.#sums;
    const steps = this.#sumSteps;
    steps.increment(sums, symbol, this.#encoder);
    steps.increment(sums, symbol, this.#decoder);
    sums.increment(symbol);
    this.#count(0, 1);
    if (sums.sum + sums.distinct <= this.#halveAt) return;
    this.#count(0, 1);
    if (sums.sum < 2 * sums.distinct) return;
    steps.halve(sums, this.#encoder);
    steps.halve(sums, this.#decoder);
    sums.halve();
  }

  /** Whether a context's total is too large, and if so whether halving helps. */
  #settle(node: number, distinct: number): void {
    const sum = this.#counted.sumOf(node);
    this.#count(0, 1);
    if (sum + distinct <= this.#halveAt) return;
    this.#count(0, 1);
    if (sum >= 2 * distinct) this.#counted.halve(node);
  }

  /** Adds the symbol to every longer context: the loop, and whether its total can be too large. */
  #appendAbove(order: number, symbol: number): void {
    if (this.#order === 0) return;
    const { contexts } = this.#runs.tree;
    this.#count(0, this.#order - order + 1);
    for (let j = order + 1; j <= this.#order; j++) {
      const node = contexts[j];
      this.#counted.append(node, symbol);
      const sum = this.#counted.sumOf(node);
      this.#count(0, 1);
      if (2 * sum <= this.#halveAt) continue;
      this.#settle(node, this.#counted.distinct(node));
    }
  }
}
