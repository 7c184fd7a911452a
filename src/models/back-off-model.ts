import type { SymbolArray } from '../symbols/sequence.ts';
import { ContextTree, NODE_FIRST, NODE_SECOND, NODE_SYMBOL, NODE_WORDS } from './context-tree.ts';
import type { IntervalSink, IntervalSource } from './interval.ts';
import type { MemoryBound } from './memory-bound.ts';
import { PositionSums } from './position-sums.ts';
import type { AdaptiveModel } from './symbol-model.ts';
import { countEntry, HAS_RUN, SymbolRuns } from './symbol-runs.ts';
import type { SymbolSums } from './symbol-sums.ts';

/** Contexts from this order on keep runs; the empty one keeps sums. */
const LOWEST_RUN = 1;

const NOT_CODED = -1;

/**
 * Adaptive order-k model that backs off by escape: method C with exclusion and update exclusion.
 *
 * The convention, in full. Let a context have seen q distinct symbols with counts c that sum to n.
 * - The longest context that has seen anything codes first, with total n + q: a symbol's interval is its count, the
 *   escape's the q at the end. A symbol new to the context escapes to the context one shorter, and so on.
 * - Exclusion: after an escape the symbols of the contexts passed cannot occur. Their counts are left out of n; the escape
 *   keeps its weight q, all distinct symbols of the context.
 * - No interval is spent where it is certain: contexts that have seen nothing, an escape where every symbol of the context is
 *   excluded, no escape where this context's symbols and the excluded ones are the whole alphabet.
 * - Below the empty context, the symbols not excluded are equally likely.
 * - Update exclusion: the context that coded the symbol and the longer ones count it (new ones with 1), shorter ones do not.
 * - A context is halved, c to ⌈c/2⌉, when n + q passes `halveAt` and n is at least 2q (so that halving helps), or a count
 *   fills its entry (2^24 − 1, or 2^16 − 1 for alphabets above 256). No total passes max(halveAt, 3m) + 1.
 *
 * With `positions` N above 1 every context, the empty one too, also knows the position of the symbol it codes, modulo N from
 * the start contexts on: backing off keeps the position to the last.
 *
 * So the symbols of a context are always among those of its suffixes.
 *
 * Cost: time goes with the symbols of a context that stand before the one coded, and with all of them on escape.
 * Source: A. Moffat, IEEE Trans. Communications 38(11), 1990 (method C, update exclusion); J. G. Cleary, I. H. Witten, IEEE
 * Trans. Communications 32(4), 1984 (exclusion); J. G. Cleary, W. J. Teahan, Computer Journal 40(2/3), 1997 (q kept).
 */
export class BackOffModel implements AdaptiveModel {
  readonly #alphabetSize: number;
  readonly #order: number;
  readonly #halveAt: number;
  readonly #runs: SymbolRuns;
  readonly #tree: ContextTree;
  readonly #positionSums: PositionSums;
  readonly #isPositional: boolean;
  /** The empty context, at the present position. */
  #sums: SymbolSums;
  /** Up to this n + q nothing is due after a symbol but its count. */
  readonly #plainTotal: number;
  #hasResetState = false;

  /** A symbol is excluded when its stamp is the present one. */
  readonly #stamps: Int32Array;
  #stamp = 0;
  readonly #excluded: Uint32Array;
  #excludedCount = 0;

  constructor(
    alphabetSize: number,
    order: number,
    halveAt: number,
    positions = 1,
    from?: BackOffModel,
  ) {
    this.#alphabetSize = alphabetSize;
    this.#order = order;
    this.#halveAt = halveAt;
    this.#runs = from
      ? from.#runs.clone()
      : new SymbolRuns(alphabetSize, order, 'up', new ContextTree(alphabetSize, order, positions));
    this.#tree = this.#runs.tree;
    const { memory } = this.#tree;
    this.#positionSums = from
      ? from.#positionSums.clone(memory)
      : new PositionSums(alphabetSize, positions, 'up', memory);
    this.#isPositional = positions > 1;
    this.#sums = this.#positionSums.at(this.#tree.contexts[0]);
    // With one symbol nothing is ever coded: no shortcut for it.
    this.#plainTotal = alphabetSize === 1 ? 0 : Math.min(halveAt, this.#runs.largestCount) - 1;
    this.#stamps = new Int32Array(alphabetSize);
    this.#excluded = new Uint32Array(alphabetSize);
  }

  get memory(): MemoryBound {
    return this.#tree.memory;
  }

  /** Copies of what it has learned, for a pass that counts operations; the contexts are as they stand. */
  learned(): { readonly runs: SymbolRuns; readonly sums: PositionSums } {
    const runs = this.#runs.clone();
    return { runs, sums: this.#positionSums.clone(runs.tree.memory) };
  }

  clone(): BackOffModel {
    const { positions } = this.#tree;
    return new BackOffModel(this.#alphabetSize, this.#order, this.#halveAt, positions, this);
  }

  markResetState(): void {
    this.#runs.mark();
    this.#positionSums.mark();
    this.#enterPosition();
    this.#hasResetState = true;
  }

  reset(): void {
    if (this.#hasResetState) {
      this.#runs.restore();
      this.#positionSums.restore();
    }
    this.startContexts();
  }

  startContexts(): void {
    this.#tree.start();
    this.#enterPosition();
  }

  #advanceEmpty(symbol: number): void {
    this.#tree.advance(symbol);
    this.#enterPosition();
  }

  #enterPosition(): void {
    this.#sums = this.#positionSums.at(this.#tree.contexts[0]);
  }

  encode(symbols: SymbolArray, from: number, to: number, sink: IntervalSink): void {
    if (this.#order < LOWEST_RUN) {
      this.#excludedCount = 0;
      for (let i = from; i < to; i++) {
        this.#encodeBelowRuns(symbols[i], sink);
        if (this.#isPositional) this.#advanceEmpty(symbols[i]);
      }
      return;
    }
    const runs = this.#runs;
    const tree = this.#tree;
    const contexts = tree.contexts;
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    const longest = this.#order;
    const plainTotal = this.#plainTotal;
    const markedNodes = runs.markedNodes;
    const isPositional = this.#isPositional;
    const { table, width } = tree.longestContexts();
    let pool = runs.pool;
    let words = tree.words;
    let node = contexts[longest];
    let last = tree.last;
    for (let i = from; i < to; i++) {
      const symbol = symbols[i];
      const at = node * NODE_WORDS;
      const first = words[at + NODE_FIRST];
      const sum = words[at + NODE_SECOND];
      let isCoded = false;
      if (words[at + NODE_SYMBOL] & HAS_RUN) {
        const distinct = pool[first];
        const end = first + distinct;
        const total = distinct === this.#alphabetSize ? sum : sum + distinct;
        let low = 0;
        let position = first + 1;
        while (position <= end && (pool[position] & mask) !== symbol) {
          low = (low + (pool[position++] >>> bits)) | 0;
        }
        if (position <= end && sum + distinct <= plainTotal) {
          if (node < markedNodes) runs.save(node);
          sink.put(low, pool[position] >>> bits, total);
          words[at + NODE_SECOND]++;
          countEntry(pool, first, position, bits);
          isCoded = true;
        }
      } else if ((first & mask) === symbol && sum > 0 && sum < plainTotal) {
        if (node < markedNodes) runs.save(node);
        sink.put(0, sum, sum + 1);
        words[at + NODE_FIRST] += 1 << bits;
        words[at + NODE_SECOND]++;
        isCoded = true;
      }
      if (isCoded) {
        const next = table.length > 0 ? table[last * width + symbol] : 0;
        if (next !== 0) {
          node = next;
          last = symbol;
          continue;
        }
        tree.moveTo(last, node);
      } else {
        tree.moveTo(last, node);
        this.#encodeAny(symbol, sink);
      }
      tree.advance(symbol);
      if (isPositional) this.#enterPosition();
      node = contexts[longest];
      last = symbol;
      words = tree.words;
      pool = runs.pool;
    }
    tree.moveTo(last, node);
  }

  decode(source: IntervalSource, symbols: SymbolArray, from: number, to: number): void {
    if (this.#order < LOWEST_RUN) {
      this.#excludedCount = 0;
      for (let i = from; i < to; i++) {
        symbols[i] = this.#decodeBelowRuns(source);
        if (this.#isPositional) this.#advanceEmpty(symbols[i]);
      }
      return;
    }
    const runs = this.#runs;
    const tree = this.#tree;
    const contexts = tree.contexts;
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    const longest = this.#order;
    const plainTotal = this.#plainTotal;
    const markedNodes = runs.markedNodes;
    const isPositional = this.#isPositional;
    const { table, width } = tree.longestContexts();
    let pool = runs.pool;
    let words = tree.words;
    let node = contexts[longest];
    let last = tree.last;
    for (let i = from; i < to; i++) {
      const at = node * NODE_WORDS;
      const first = words[at + NODE_FIRST];
      const sum = words[at + NODE_SECOND];
      let symbol = NOT_CODED;
      if (words[at + NODE_SYMBOL] & HAS_RUN) {
        const distinct = pool[first];
        const total = distinct === this.#alphabetSize ? sum : sum + distinct;
        const target = sum + distinct <= plainTotal ? source.target(total) : sum;
        if (target < sum) {
          let low = 0;
          let position = first + 1;
          let count = pool[position] >>> bits;
          while (((low + count) | 0) <= target) {
            low = (low + count) | 0;
            count = pool[++position] >>> bits;
          }
          source.take(low, count);
          symbol = pool[position] & mask;
          if (node < markedNodes) runs.save(node);
          words[at + NODE_SECOND]++;
          countEntry(pool, first, position, bits);
        }
      } else if (sum > 0 && sum < plainTotal) {
        if (source.target(sum + 1) < sum) {
          source.take(0, sum);
          symbol = first & mask;
          if (node < markedNodes) runs.save(node);
          words[at + NODE_FIRST] += 1 << bits;
          words[at + NODE_SECOND]++;
        }
      }
      if (symbol !== NOT_CODED) {
        symbols[i] = symbol;
        const next = table.length > 0 ? table[last * width + symbol] : 0;
        if (next !== 0) {
          node = next;
          last = symbol;
          continue;
        }
        tree.moveTo(last, node);
      } else {
        tree.moveTo(last, node);
        symbol = this.#decodeAny(source);
        symbols[i] = symbol;
      }
      tree.advance(symbol);
      if (isPositional) this.#enterPosition();
      node = contexts[longest];
      last = symbol;
      words = tree.words;
      pool = runs.pool;
    }
    tree.moveTo(last, node);
  }

  /** Codes a symbol in whatever contexts it takes. The loop of `encode` is the shortcut of this for the commonest case. */
  #encodeAny(symbol: number, sink: IntervalSink): void {
    this.#clearExclusion();
    const runs = this.#runs;
    const words = this.#tree.words;
    const order = this.#longestInUse();
    if (order < LOWEST_RUN) {
      this.#encodeBelowRuns(symbol, sink);
      return;
    }
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    const node = this.#tree.contexts[order];
    const at = node * NODE_WORDS;
    const first = words[at + NODE_FIRST];
    const sum = words[at + NODE_SECOND];
    if (!(words[at + NODE_SYMBOL] & HAS_RUN)) {
      const only = first & mask;
      if (only === symbol) {
        if (this.#alphabetSize > 1) sink.put(0, sum, sum + 1);
        runs.incrementOnly(node);
        this.#settle(node, 1);
        this.#appendAbove(order, symbol);
        return;
      }
      sink.put(sum, 1, sum + 1);
      this.#exclude(only);
    } else {
      const pool = runs.pool;
      const distinct = pool[first];
      const end = first + distinct;
      const total = distinct === this.#alphabetSize ? sum : sum + distinct;
      let low = 0;
      for (let position = first + 1; position <= end; position++) {
        const other = pool[position] & mask;
        if (other === symbol) {
          sink.put(low, pool[position] >>> bits, total);
          runs.increment(node, position);
          this.#settle(node, distinct);
          this.#appendAbove(order, symbol);
          return;
        }
        low = (low + (pool[position] >>> bits)) | 0;
        this.#exclude(other);
      }
      sink.put(sum, distinct, total);
    }
    this.#encodeEscaped(order - 1, symbol, sink);
  }

  #decodeAny(source: IntervalSource): number {
    this.#clearExclusion();
    const runs = this.#runs;
    const words = this.#tree.words;
    const order = this.#longestInUse();
    if (order < LOWEST_RUN) return this.#decodeBelowRuns(source);
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    const node = this.#tree.contexts[order];
    const at = node * NODE_WORDS;
    const first = words[at + NODE_FIRST];
    const sum = words[at + NODE_SECOND];
    if (!(words[at + NODE_SYMBOL] & HAS_RUN)) {
      const only = first & mask;
      if (this.#alphabetSize === 1 || source.target(sum + 1) < sum) {
        if (this.#alphabetSize > 1) source.take(0, sum);
        runs.incrementOnly(node);
        this.#settle(node, 1);
        this.#appendAbove(order, only);
        return only;
      }
      source.take(sum, 1);
      this.#exclude(only);
    } else {
      const pool = runs.pool;
      const distinct = pool[first];
      const end = first + distinct;
      const target = source.target(distinct === this.#alphabetSize ? sum : sum + distinct);
      if (target < sum) {
        let low = 0;
        let position = first + 1;
        let count = pool[position] >>> bits;
        while (low + count <= target) {
          low = (low + count) | 0;
          count = pool[++position] >>> bits;
        }
        const symbol = pool[position] & mask;
        source.take(low, count);
        runs.increment(node, position);
        this.#settle(node, distinct);
        this.#appendAbove(order, symbol);
        return symbol;
      }
      source.take(sum, distinct);
      for (let position = first + 1; position <= end; position++) {
        this.#exclude(pool[position] & mask);
      }
    }
    return this.#decodeEscaped(order - 1, source);
  }

  /** The longest order whose context has seen anything; 0 or less where no run has. */
  #longestInUse(): number {
    const words = this.#tree.words;
    const contexts = this.#tree.contexts;
    let order = this.#order;
    while (order >= LOWEST_RUN && words[contexts[order] * NODE_WORDS + NODE_SECOND] === 0) order--;
    return order;
  }

  #clearExclusion(): void {
    this.#excludedCount = 0;
    if (++this.#stamp === 2 ** 30) {
      this.#stamps.fill(0);
      this.#stamp = 1;
    }
  }

  #exclude(symbol: number): void {
    this.#stamps[symbol] = this.#stamp;
    this.#excluded[this.#excludedCount++] = symbol;
  }

  /** Halves a context that was just counted in, if its total has grown too large. */
  #settle(node: number, distinct: number): void {
    const sum = this.#tree.words[node * NODE_WORDS + NODE_SECOND];
    if (sum + distinct > this.#halveAt && sum >= 2 * distinct) this.#runs.halve(node);
  }

  /** Adds the symbol to every context longer than the one of `order` that coded it. */
  #appendAbove(order: number, symbol: number): void {
    const contexts = this.#tree.contexts;
    for (let j = order + 1; j <= this.#order; j++) {
      this.#runs.append(contexts[j], symbol);
      const sum = this.#tree.words[contexts[j] * NODE_WORDS + NODE_SECOND];
      if (2 * sum > this.#halveAt) this.#settle(contexts[j], this.#runs.distinct(contexts[j]));
    }
  }

  /** Counts a symbol in the empty context; returns the counts of all smaller symbols before that. */
  #countEmpty(symbol: number): number {
    const sums = this.#sums;
    const low = sums.increment(symbol);
    if (sums.sum + sums.distinct > this.#halveAt && sums.sum >= 2 * sums.distinct) sums.halve();
    return low;
  }

  /** Codes a symbol in the contexts of `from` and shorter, with what is excluded by now. */
  #encodeEscaped(from: number, symbol: number, sink: IntervalSink): void {
    const runs = this.#runs;
    const words = this.#tree.words;
    const pool = runs.pool;
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    for (let order = from; order >= LOWEST_RUN; order--) {
      const node = this.#tree.contexts[order];
      const at = node * NODE_WORDS;
      // A suffix of a context that has seen something else than what was coded has seen at least as much.
      const first = words[at + NODE_FIRST];
      const hasRun = (words[at + NODE_SYMBOL] & HAS_RUN) !== 0;
      if (!hasRun) continue;
      const distinct = pool[first];
      const before = this.#excludedCount;
      let sum = 0;
      let low = 0;
      let frequency = 0;
      let found = 0;
      for (let position = first + 1; position <= first + distinct; position++) {
        const other = pool[position] & mask;
        if (this.#stamps[other] === this.#stamp) continue;
        const count = pool[position] >>> bits;
        if (other === symbol) {
          low = sum;
          frequency = count;
          found = position;
        }
        sum = (sum + count) | 0;
        this.#exclude(other);
      }
      if (this.#excludedCount === before) continue;
      const total = this.#excludedCount === this.#alphabetSize ? sum : sum + distinct;
      if (found !== 0) {
        if (frequency < total) sink.put(low, frequency, total);
        runs.increment(node, found);
        this.#settle(node, distinct);
        this.#appendAbove(order, symbol);
        return;
      }
      sink.put(sum, distinct, total);
    }
    this.#encodeBelowRuns(symbol, sink);
  }

  #decodeEscaped(from: number, source: IntervalSource): number {
    const runs = this.#runs;
    const words = this.#tree.words;
    const pool = runs.pool;
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    for (let order = from; order >= LOWEST_RUN; order--) {
      const node = this.#tree.contexts[order];
      const at = node * NODE_WORDS;
      const first = words[at + NODE_FIRST];
      if ((words[at + NODE_SYMBOL] & HAS_RUN) === 0) continue;
      const distinct = pool[first];
      const end = first + distinct;
      let sum = 0;
      let fresh = 0;
      for (let position = first + 1; position <= end; position++) {
        if (this.#stamps[pool[position] & mask] === this.#stamp) continue;
        sum = (sum + (pool[position] >>> bits)) | 0;
        fresh++;
      }
      if (fresh === 0) continue;
      const total = this.#excludedCount + fresh === this.#alphabetSize ? sum : sum + distinct;
      const certain = fresh === 1 && total === sum;
      const target = certain ? 0 : source.target(total);
      if (target < sum) {
        let low = 0;
        let position = first;
        let count = 0;
        do {
          low = (low + count) | 0;
          do position++;
          while (this.#stamps[pool[position] & mask] === this.#stamp);
          count = pool[position] >>> bits;
        } while (low + count <= target);
        if (!certain) source.take(low, count);
        const symbol = pool[position] & mask;
        runs.increment(node, position);
        this.#settle(node, distinct);
        this.#appendAbove(order, symbol);
        return symbol;
      }
      source.take(sum, distinct);
      for (let position = first + 1; position <= end; position++) {
        const other = pool[position] & mask;
        if (this.#stamps[other] !== this.#stamp) this.#exclude(other);
      }
    }
    return this.#decodeBelowRuns(source);
  }

  /** Codes a symbol in the empty context, and below it; what is excluded was seen there too. */
  #encodeBelowRuns(symbol: number, sink: IntervalSink): void {
    const sums = this.#sums;
    const { distinct } = sums;
    const excluded = this.#excluded;
    if (distinct > this.#excludedCount) {
      let sum = sums.sum;
      let excludedBelow = 0;
      for (let i = 0; i < this.#excludedCount; i++) {
        const count = sums.counts[excluded[i]];
        sum -= count;
        if (excluded[i] < symbol) excludedBelow += count;
      }
      const total = distinct === this.#alphabetSize ? sum : sum + distinct;
      if (sums.hasSeen(symbol)) {
        const frequency = sums.counts[symbol];
        const low = this.#countEmpty(symbol) - excludedBelow;
        if (frequency < total) sink.put(low, frequency, total);
        this.#appendAbove(0, symbol);
        return;
      }
      sink.put(sum, distinct, total);
    }
    const left = this.#alphabetSize - distinct;
    if (left > 1) sink.put(symbol - sums.seenBelow(symbol), 1, left);
    this.#countEmpty(symbol);
    this.#appendAbove(0, symbol);
  }

  #decodeBelowRuns(source: IntervalSource): number {
    const sums = this.#sums;
    const { distinct } = sums;
    if (distinct > this.#excludedCount) {
      for (let i = 0; i < this.#excludedCount; i++) sums.takeOut(this.#excluded[i]);
      const { sum } = sums;
      const total = distinct === this.#alphabetSize ? sum : sum + distinct;
      const certain = total === sum && distinct === this.#excludedCount + 1;
      const target = certain ? 0 : source.target(total);
      const symbol = target < sum ? sums.holding(target, 1, 0) : -1;
      const low = symbol < 0 ? sum : sums.sumBelow(symbol);
      for (let i = 0; i < this.#excludedCount; i++) sums.putBack(this.#excluded[i]);
      if (symbol >= 0) {
        if (!certain) source.take(low, sums.counts[symbol]);
        this.#countEmpty(symbol);
        this.#appendAbove(0, symbol);
        return symbol;
      }
      source.take(low, distinct);
    }
    const left = this.#alphabetSize - distinct;
    let rank = 0;
    if (left > 1) {
      rank = source.target(left);
      source.take(rank, 1);
    }
    const symbol = sums.unseenAt(rank);
    this.#countEmpty(symbol);
    this.#appendAbove(0, symbol);
    return symbol;
  }
}
