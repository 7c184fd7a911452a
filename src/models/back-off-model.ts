import type { SymbolArray } from '../symbols/sequence.ts';
import {
  type ContextTree,
  NODE_FIRST,
  NODE_SECOND,
  NODE_SYMBOL,
  NODE_WORDS,
} from './context-tree.ts';
import type { IntervalSource, IntervalTape } from './interval.ts';
import type { AdaptiveModel } from './symbol-model.ts';
import { HAS_RUN, SymbolRuns } from './symbol-runs.ts';
import { WideCounts } from './wide-counts.ts';

/** Above this alphabet size the empty context is kept as sums instead of a run. */
const LARGEST_NARROW = 256;

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
 * So the symbols of a context are always among those of its suffixes.
 *
 * Cost: time goes with the symbols of a context that stand before the one coded, and with all of them on escape.
 * Source: A. Moffat, IEEE Trans. Communications 38(11), 1990 (method C, update exclusion); J. G. Cleary, I. H. Witten, IEEE
 * Trans. Communications 32(4), 1984 (exclusion); J. G. Cleary, W. J. Teahan, Computer Journal 40(2/3), 1997 (q kept).
 */
export class BackOffModel implements AdaptiveModel {
  readonly intervalsPerSymbol: number;
  readonly #alphabetSize: number;
  readonly #order: number;
  readonly #halveAt: number;
  readonly #runs: SymbolRuns;
  readonly #tree: ContextTree;
  /** The empty context of a large alphabet; then runs begin at order 1. */
  readonly #wide: WideCounts | undefined;
  readonly #lowestRun: number;
  #hasResetState = false;

  /** A symbol is excluded when its stamp is the present one. */
  readonly #stamps: Int32Array;
  #stamp = 0;
  readonly #excluded: Uint32Array;
  #excludedCount = 0;

  constructor(alphabetSize: number, order: number, halveAt: number, from?: BackOffModel) {
    this.intervalsPerSymbol = order + 2;
    this.#alphabetSize = alphabetSize;
    this.#order = order;
    this.#halveAt = halveAt;
    this.#runs = from ? from.#runs.clone() : new SymbolRuns(alphabetSize, order, 'up');
    this.#tree = this.#runs.tree;
    this.#wide = from
      ? from.#wide?.clone()
      : alphabetSize > LARGEST_NARROW
        ? new WideCounts(alphabetSize, 'up')
        : undefined;
    this.#lowestRun = this.#wide === undefined ? 0 : 1;
    this.#stamps = new Int32Array(alphabetSize);
    this.#excluded = new Uint32Array(alphabetSize);
  }

  clone(): BackOffModel {
    return new BackOffModel(this.#alphabetSize, this.#order, this.#halveAt, this);
  }

  markResetState(): void {
    this.#runs.mark();
    this.#wide?.mark();
    this.#hasResetState = true;
  }

  reset(): void {
    if (this.#hasResetState) {
      this.#runs.restore();
      this.#wide?.restore();
    }
    this.#tree.start();
  }

  startContexts(): void {
    this.#tree.start();
  }

  encode(symbols: SymbolArray, from: number, to: number, tape: IntervalTape): void {
    const runs = this.#runs;
    const tree = this.#tree;
    const contexts = tree.contexts;
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    const lowestRun = this.#lowestRun;
    for (let i = from; i < to; i++) {
      const symbol = symbols[i];
      const words = tree.words;
      let order = this.#order;
      while (order >= lowestRun && words[contexts[order] * NODE_WORDS + NODE_SECOND] === 0) order--;
      if (order < lowestRun) {
        this.#clearExclusion();
        this.#encodeBelowRuns(symbol, tape);
      } else {
        const node = contexts[order];
        const at = node * NODE_WORDS;
        const first = words[at + NODE_FIRST];
        const sum = words[at + NODE_SECOND];
        if (!(words[at + NODE_SYMBOL] & HAS_RUN)) {
          if ((first & mask) === symbol) {
            if (this.#alphabetSize > 1) tape.put(0, sum, sum + 1);
            runs.incrementOnly(node);
            this.#settle(node, 1);
            this.#appendAbove(order, symbol);
          } else {
            tape.put(sum, 1, sum + 1);
            this.#clearExclusion();
            this.#exclude(first & mask);
            this.#encodeEscaped(order - 1, symbol, tape);
          }
        } else {
          const pool = runs.pool;
          const distinct = pool[first];
          const end = first + distinct;
          const total = distinct === this.#alphabetSize ? sum : sum + distinct;
          let low = 0;
          let position = first + 1;
          while (position <= end && (pool[position] & mask) !== symbol) {
            low = (low + (pool[position++] >>> bits)) | 0;
          }
          if (position <= end) {
            tape.put(low, pool[position] >>> bits, total);
            runs.increment(node, position);
            this.#settle(node, distinct);
            this.#appendAbove(order, symbol);
          } else {
            tape.put(sum, distinct, total);
            this.#clearExclusion();
            for (let j = first + 1; j <= end; j++) this.#exclude(pool[j] & mask);
            this.#encodeEscaped(order - 1, symbol, tape);
          }
        }
      }
      tree.advance(symbol);
    }
  }

  decode(source: IntervalSource, symbols: SymbolArray, from: number, to: number): void {
    const runs = this.#runs;
    const tree = this.#tree;
    const contexts = tree.contexts;
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    const lowestRun = this.#lowestRun;
    for (let i = from; i < to; i++) {
      const words = tree.words;
      let symbol: number;
      let order = this.#order;
      while (order >= lowestRun && words[contexts[order] * NODE_WORDS + NODE_SECOND] === 0) order--;
      if (order < lowestRun) {
        this.#clearExclusion();
        symbol = this.#decodeBelowRuns(source);
      } else {
        const node = contexts[order];
        const at = node * NODE_WORDS;
        const first = words[at + NODE_FIRST];
        const sum = words[at + NODE_SECOND];
        if (!(words[at + NODE_SYMBOL] & HAS_RUN)) {
          if (this.#alphabetSize === 1 || source.target(sum + 1) < sum) {
            symbol = first & mask;
            if (this.#alphabetSize > 1) source.take(0, sum);
            runs.incrementOnly(node);
            this.#settle(node, 1);
            this.#appendAbove(order, symbol);
          } else {
            source.take(sum, 1);
            this.#clearExclusion();
            this.#exclude(first & mask);
            symbol = this.#decodeEscaped(order - 1, source);
          }
        } else {
          const pool = runs.pool;
          const distinct = pool[first];
          const total = distinct === this.#alphabetSize ? sum : sum + distinct;
          const target = source.target(total);
          if (target < sum) {
            let low = 0;
            let position = first + 1;
            let count = pool[position] >>> bits;
            while (low + count <= target) {
              low = (low + count) | 0;
              count = pool[++position] >>> bits;
            }
            source.take(low, count);
            symbol = pool[position] & mask;
            runs.increment(node, position);
            this.#settle(node, distinct);
            this.#appendAbove(order, symbol);
          } else {
            source.take(sum, distinct);
            this.#clearExclusion();
            for (let j = first + 1; j <= first + distinct; j++) this.#exclude(pool[j] & mask);
            symbol = this.#decodeEscaped(order - 1, source);
          }
        }
      }
      symbols[i] = symbol;
      tree.advance(symbol);
    }
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
    for (let j = Math.max(order + 1, this.#lowestRun); j <= this.#order; j++) {
      this.#runs.append(contexts[j], symbol);
      const sum = this.#tree.words[contexts[j] * NODE_WORDS + NODE_SECOND];
      if (2 * sum > this.#halveAt) this.#settle(contexts[j], this.#runs.distinct(contexts[j]));
    }
    if (order < 0 && this.#wide !== undefined) this.#countWide(symbol);
  }

  #countWide(symbol: number): void {
    const wide = this.#wide!;
    wide.increment(symbol);
    if (wide.sum + wide.distinct > this.#halveAt && wide.sum >= 2 * wide.distinct) wide.halve();
  }

  /** Codes a symbol in the contexts of `from` and shorter, with what is excluded by now. */
  #encodeEscaped(from: number, symbol: number, tape: IntervalTape): void {
    const runs = this.#runs;
    const words = this.#tree.words;
    const pool = runs.pool;
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    for (let order = from; order >= this.#lowestRun; order--) {
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
        if (frequency < total) tape.put(low, frequency, total);
        runs.increment(node, found);
        this.#settle(node, distinct);
        this.#appendAbove(order, symbol);
        return;
      }
      tape.put(sum, distinct, total);
    }
    this.#encodeBelowRuns(symbol, tape);
  }

  #decodeEscaped(from: number, source: IntervalSource): number {
    const runs = this.#runs;
    const words = this.#tree.words;
    const pool = runs.pool;
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    for (let order = from; order >= this.#lowestRun; order--) {
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

  /** Codes a symbol in the empty context of a large alphabet, and below the empty context. */
  #encodeBelowRuns(symbol: number, tape: IntervalTape): void {
    const wide = this.#wide;
    if (wide === undefined) {
      const left = this.#alphabetSize - this.#excludedCount;
      if (left > 1) tape.put(symbol - this.#excludedBelow(symbol), 1, left);
      this.#appendAbove(-1, symbol);
      return;
    }
    const fresh = wide.distinct - this.#excludedCount;
    if (fresh > 0) {
      this.#takeExcludedOut();
      const sum = wide.sum;
      const total = wide.distinct === this.#alphabetSize ? sum : sum + wide.distinct;
      const seen = wide.hasSeen(symbol);
      const low = seen ? wide.sumBelow(symbol) : sum;
      this.#putExcludedBack();
      if (seen) {
        if (wide.counts[symbol] < total) tape.put(low, wide.counts[symbol], total);
        this.#countWide(symbol);
        this.#appendAbove(0, symbol);
        return;
      }
      tape.put(low, wide.distinct, total);
    }
    const left = this.#alphabetSize - wide.distinct;
    if (left > 1) tape.put(symbol - wide.seenBelow(symbol), 1, left);
    this.#appendAbove(-1, symbol);
  }

  #decodeBelowRuns(source: IntervalSource): number {
    const wide = this.#wide;
    const excluded = wide === undefined ? this.#excludedCount : wide.distinct;
    if (wide !== undefined && wide.distinct > this.#excludedCount) {
      const fresh = wide.distinct - this.#excludedCount;
      this.#takeExcludedOut();
      const sum = wide.sum;
      const total = wide.distinct === this.#alphabetSize ? sum : sum + wide.distinct;
      const certain = fresh === 1 && total === sum;
      const target = certain ? 0 : source.target(total);
      const symbol = target < sum ? wide.atSum(target) : -1;
      const low = symbol < 0 ? sum : wide.sumBelow(symbol);
      this.#putExcludedBack();
      if (symbol >= 0) {
        if (!certain) source.take(low, wide.counts[symbol]);
        this.#countWide(symbol);
        this.#appendAbove(0, symbol);
        return symbol;
      }
      source.take(low, wide.distinct);
    }
    const left = this.#alphabetSize - excluded;
    let rank = 0;
    if (left > 1) {
      rank = source.target(left);
      source.take(rank, 1);
    }
    const symbol = wide === undefined ? this.#notExcludedAt(rank) : wide.unseenAt(rank);
    this.#appendAbove(-1, symbol);
    return symbol;
  }

  #takeExcludedOut(): void {
    for (let i = 0; i < this.#excludedCount; i++) this.#wide!.takeOut(this.#excluded[i]);
  }

  #putExcludedBack(): void {
    for (let i = 0; i < this.#excludedCount; i++) this.#wide!.putBack(this.#excluded[i]);
  }

  #excludedBelow(symbol: number): number {
    let below = 0;
    for (let i = 0; i < this.#excludedCount; i++) if (this.#excluded[i] < symbol) below++;
    return below;
  }

  /** The symbol not excluded that has `rank` such symbols below it. */
  #notExcludedAt(rank: number): number {
    let symbol = rank;
    for (let shift = 0; ; ) {
      let upTo = 0;
      for (let i = 0; i < this.#excludedCount; i++) if (this.#excluded[i] <= symbol) upTo++;
      if (upTo === shift) return symbol;
      shift = upTo;
      symbol = rank + shift;
    }
  }
}
