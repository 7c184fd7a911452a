import type { SymbolArray } from '../symbols/sequence.ts';
import { ContextTree, NODE_FIRST, NODE_SECOND, NODE_SYMBOL, NODE_WORDS } from './context-tree.ts';
import type { IntervalSink, IntervalSource } from './interval.ts';
import type { MemoryBound } from './memory-bound.ts';
import { PositionSums } from './position-sums.ts';
import type { AdaptiveModel } from './symbol-model.ts';
import { countEntry, HAS_RUN, SymbolRuns } from './symbol-runs.ts';

/** Pseudo-count added to every symbol, p / q: 1/2 for Krichevsky–Trofimov, 1 for Laplace. */
export interface AddedCount {
  readonly p: number;
  readonly q: number;
}

/**
 * Adaptive order-k model with additive counts and no back-off: in each context a symbol seen c times of n has probability
 * (c + p/q) ÷ (n + m·p/q), coded exactly as q·c + p of q·n + p·m.
 *
 * Nothing is initialised for a context: the symbols seen stand first, in the order of their run, then the others in the
 * order of the alphabet (order 0: all in the order of the alphabet). A context is halved, c to
 * ⌊c/2⌋, when q·n + p·m passes `halveAt` or a count fills its entry; the total never passes halveAt.
 *
 * With `positions` N above 1 contexts also know the position of the symbol they code, modulo N from the start contexts on.
 *
 * Without halving, the code length of a context's symbols is the Dirichlet–multinomial form
 * log2 [Γ(n + mα) Γ(α)^m ÷ (Γ(mα) Π Γ(c + α))], α = p/q.
 *
 * Cost: time goes with the symbols of a context that stand before the one coded; with all of them for one not yet seen.
 * Source: R. Krichevsky, V. Trofimov, IEEE Trans. Inf. Theory 27(2), 1981 (p/q = 1/2); Laplace's rule (1).
 */
export class AdditiveModel implements AdaptiveModel {
  readonly #alphabetSize: number;
  readonly #order: number;
  readonly #added: AddedCount;
  readonly #halveAt: number;
  readonly #runs: SymbolRuns;
  /** Order 0 only. */
  readonly #sums: PositionSums | undefined;
  #hasResetState = false;

  constructor(
    alphabetSize: number,
    order: number,
    added: AddedCount,
    halveAt: number,
    positions = 1,
    from?: AdditiveModel,
  ) {
    this.#alphabetSize = alphabetSize;
    this.#order = order;
    this.#added = added;
    this.#halveAt = halveAt;
    this.#runs = from
      ? from.#runs.clone()
      : new SymbolRuns(
          alphabetSize,
          order,
          'down',
          new ContextTree(alphabetSize, order, positions),
        );
    if (order > 0) return;
    const { memory } = this.#runs.tree;
    const fromSums = from ? from.#sums : undefined;
    this.#sums = fromSums
      ? fromSums.clone(memory)
      : new PositionSums(alphabetSize, positions, 'down', memory);
  }

  get memory(): MemoryBound {
    return this.#runs.tree.memory;
  }

  /** Copies of what it has learned, for a pass that counts operations; the contexts are as they stand. */
  learned(): { readonly runs: SymbolRuns; readonly sums: PositionSums | undefined } {
    const runs = this.#runs.clone();
    return { runs, sums: this.#sums?.clone(runs.tree.memory) };
  }

  clone(): AdditiveModel {
    const { positions } = this.#runs.tree;
    return new AdditiveModel(
      this.#alphabetSize,
      this.#order,
      this.#added,
      this.#halveAt,
      positions,
      this,
    );
  }

  markResetState(): void {
    this.#runs.mark();
    this.#sums?.mark();
    this.#hasResetState = true;
  }

  reset(): void {
    if (this.#hasResetState) {
      this.#runs.restore();
      this.#sums?.restore();
    }
    this.#runs.tree.start();
  }

  startContexts(): void {
    this.#runs.tree.start();
  }

  encode(symbols: SymbolArray, from: number, to: number, sink: IntervalSink): void {
    if (this.#sums !== undefined) {
      this.#encodeEmpty(this.#sums, symbols, from, to, sink);
      return;
    }
    const runs = this.#runs;
    const tree = runs.tree;
    const contexts = tree.contexts;
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    const order = this.#order;
    const { p, q } = this.#added;
    const base = p * this.#alphabetSize;
    // Up to this total nothing can be due but the count itself.
    const plainTotal = Math.min(this.#halveAt - q, q * (runs.largestCount - 1));
    const markedNodes = runs.markedNodes;
    const { table, width } = tree.longestContexts();
    let pool = runs.pool;
    let words = tree.words;
    let node = contexts[order];
    let last = tree.last;
    for (let i = from; i < to; i++) {
      const symbol = symbols[i];
      const at = node * NODE_WORDS;
      const first = words[at + NODE_FIRST];
      const total = q * words[at + NODE_SECOND] + base;
      if (words[at + NODE_SYMBOL] & HAS_RUN) {
        const end = first + pool[first];
        let counts = 0;
        let position = first + 1;
        while (position <= end && (pool[position] & mask) !== symbol) {
          counts = (counts + (pool[position++] >>> bits)) | 0;
        }
        if (position <= end) {
          const low = q * counts + p * (position - first - 1);
          sink.put(low, q * (pool[position] >>> bits) + p, total);
          if (total <= plainTotal) {
            if (node < markedNodes) runs.save(node);
            words[at + NODE_SECOND]++;
            countEntry(pool, first, position, bits);
            const next = table.length > 0 ? table[last * width + symbol] : 0;
            if (next !== 0) {
              node = next;
              last = symbol;
              continue;
            }
          } else {
            runs.increment(node, position);
          }
        } else {
          let below = 0;
          for (let j = first + 1; j <= end; j++) if ((pool[j] & mask) < symbol) below++;
          sink.put(q * counts + p * (end - first + symbol - below), p, total);
          runs.append(node, symbol);
        }
      } else if (first !== 0) {
        const only = first & mask;
        const count = first >>> bits;
        if (only === symbol) {
          if (this.#alphabetSize > 1) sink.put(0, q * count + p, total);
          runs.incrementOnly(node);
        } else {
          sink.put(q * count + p * (only < symbol ? symbol : symbol + 1), p, total);
          runs.append(node, symbol);
        }
      } else {
        if (this.#alphabetSize > 1) sink.put(p * symbol, p, total);
        runs.append(node, symbol);
      }
      if (total > plainTotal) this.#settle(node);
      tree.moveTo(last, node);
      tree.advance(symbol);
      node = contexts[order];
      last = symbol;
      words = tree.words;
      pool = runs.pool;
    }
    tree.moveTo(last, node);
  }

  decode(source: IntervalSource, symbols: SymbolArray, from: number, to: number): void {
    if (this.#sums !== undefined) {
      this.#decodeEmpty(this.#sums, source, symbols, from, to);
      return;
    }
    const runs = this.#runs;
    const tree = runs.tree;
    const contexts = tree.contexts;
    const bits = runs.symbolBits;
    const mask = 2 ** bits - 1;
    const { p, q } = this.#added;
    const base = p * this.#alphabetSize;
    for (let i = from; i < to; i++) {
      const node = contexts[this.#order];
      const words = tree.words;
      const at = node * NODE_WORDS;
      const first = words[at + NODE_FIRST];
      const hasRun = (words[at + NODE_SYMBOL] & HAS_RUN) !== 0;
      const pool = runs.pool;
      const distinct = hasRun ? pool[first] : first !== 0 ? 1 : 0;
      const sum = words[at + NODE_SECOND];
      const total = q * sum + base;
      const target = this.#alphabetSize === 1 ? 0 : source.target(total);
      const unseenFrom = q * sum + p * distinct;
      let symbol: number;
      if (target >= unseenFrom) {
        const rank = Math.floor((target - unseenFrom) / p);
        symbol = hasRun ? unseenInRun(pool, first, mask, rank) : unseenBesides(first, mask, rank);
        if (this.#alphabetSize > 1) source.take(unseenFrom + p * rank, p);
        runs.append(node, symbol);
      } else if (hasRun) {
        let low = 0;
        let position = first + 1;
        let weight = q * (pool[position] >>> bits) + p;
        while (low + weight <= target) {
          low = (low + weight) | 0;
          weight = q * (pool[++position] >>> bits) + p;
        }
        symbol = pool[position] & mask;
        source.take(low, weight);
        runs.increment(node, position);
      } else {
        symbol = first & mask;
        if (this.#alphabetSize > 1) source.take(0, q * (first >>> bits) + p);
        runs.incrementOnly(node);
      }
      symbols[i] = symbol;
      if (total + q > this.#halveAt) this.#settle(node);
      tree.advance(symbol);
    }
  }

  #settle(node: number): void {
    const { p, q } = this.#added;
    const at = node * NODE_WORDS + NODE_SECOND;
    const words = this.#runs.tree.words;
    while (q * words[at] + p * this.#alphabetSize > this.#halveAt) this.#runs.halve(node);
  }

  #encodeEmpty(
    positionSums: PositionSums,
    symbols: SymbolArray,
    from: number,
    to: number,
    sink: IntervalSink,
  ): void {
    const { p, q } = this.#added;
    const base = p * this.#alphabetSize;
    const tree = this.#runs.tree;
    let sums = positionSums.at(tree.contexts[0]);
    for (let i = from; i < to; i++) {
      const symbol = symbols[i];
      const total = q * sums.sum + base;
      const weight = q * sums.counts[symbol] + p;
      const low = q * sums.increment(symbol) + p * symbol;
      if (this.#alphabetSize > 1) sink.put(low, weight, total);
      while (q * sums.sum + base > this.#halveAt) sums.halve();
      if (tree.positions > 1) {
        tree.advance(symbol);
        sums = positionSums.at(tree.contexts[0]);
      }
    }
  }

  #decodeEmpty(
    positionSums: PositionSums,
    source: IntervalSource,
    symbols: SymbolArray,
    from: number,
    to: number,
  ): void {
    const { p, q } = this.#added;
    const base = p * this.#alphabetSize;
    const tree = this.#runs.tree;
    let sums = positionSums.at(tree.contexts[0]);
    for (let i = from; i < to; i++) {
      let symbol = 0;
      if (this.#alphabetSize > 1) {
        symbol = sums.holding(source.target(q * sums.sum + base), q, p);
        const weight = q * sums.counts[symbol] + p;
        source.take(q * sums.increment(symbol) + p * symbol, weight);
      }
      symbols[i] = symbol;
      while (q * sums.sum + base > this.#halveAt) sums.halve();
      if (tree.positions > 1) {
        tree.advance(symbol);
        sums = positionSums.at(tree.contexts[0]);
      }
    }
  }
}

/** The symbol besides the one of `entry` (none when 0) that has `rank` others below it. */
function unseenBesides(entry: number, mask: number, rank: number): number {
  return entry !== 0 && rank >= (entry & mask) ? rank + 1 : rank;
}

/** The symbol that is not in the run and has `rank` such symbols below it. */
function unseenInRun(pool: Uint32Array, run: number, mask: number, rank: number): number {
  const end = run + pool[run];
  let symbol = rank;
  for (let shift = 0; ; ) {
    let upTo = 0;
    for (let i = run + 1; i <= end; i++) if ((pool[i] & mask) <= symbol) upTo++;
    if (upTo === shift) return symbol;
    shift = upTo;
    symbol = rank + shift;
  }
}
