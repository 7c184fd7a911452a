import type { SymbolArray } from '../symbols/sequence.ts';
import { NODE_FIRST, NODE_SECOND, NODE_SYMBOL, NODE_WORDS } from './context-tree.ts';
import type { IntervalSource, IntervalTape } from './interval.ts';
import type { AdaptiveModel } from './symbol-model.ts';
import { HAS_RUN, SymbolRuns } from './symbol-runs.ts';
import { WideCounts } from './wide-counts.ts';

/** Above this alphabet size an order-0 model keeps sums instead of a run. */
const LARGEST_NARROW = 256;

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
 * order of the alphabet (order 0 of alphabets above 256: all in the order of the alphabet). A context is halved, c to
 * ⌊c/2⌋, when q·n + p·m passes `halveAt` or a count fills its entry; the total never passes halveAt.
 *
 * Without halving, the code length of a context's symbols is the Dirichlet–multinomial form
 * log2 [Γ(n + mα) Γ(α)^m ÷ (Γ(mα) Π Γ(c + α))], α = p/q.
 *
 * Cost: time goes with the symbols of a context that stand before the one coded; with all of them for one not yet seen.
 * Source: R. Krichevsky, V. Trofimov, IEEE Trans. Inf. Theory 27(2), 1981 (p/q = 1/2); Laplace's rule (1).
 */
export class AdditiveModel implements AdaptiveModel {
  readonly intervalsPerSymbol = 1;
  readonly #alphabetSize: number;
  readonly #order: number;
  readonly #added: AddedCount;
  readonly #halveAt: number;
  readonly #runs: SymbolRuns;
  readonly #wide: WideCounts | undefined;
  #hasResetState = false;

  constructor(
    alphabetSize: number,
    order: number,
    added: AddedCount,
    halveAt: number,
    from?: AdditiveModel,
  ) {
    this.#alphabetSize = alphabetSize;
    this.#order = order;
    this.#added = added;
    this.#halveAt = halveAt;
    this.#runs = from ? from.#runs.clone() : new SymbolRuns(alphabetSize, order, 'down');
    this.#wide = from
      ? from.#wide?.clone()
      : order === 0 && alphabetSize > LARGEST_NARROW
        ? new WideCounts(alphabetSize, 'down')
        : undefined;
  }

  clone(): AdditiveModel {
    return new AdditiveModel(this.#alphabetSize, this.#order, this.#added, this.#halveAt, this);
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
    this.#runs.tree.start();
  }

  startContexts(): void {
    this.#runs.tree.start();
  }

  encode(symbols: SymbolArray, from: number, to: number, tape: IntervalTape): void {
    if (this.#wide !== undefined) {
      this.#encodeWide(this.#wide, symbols, from, to, tape);
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
      const symbol = symbols[i];
      const node = contexts[this.#order];
      const words = tree.words;
      const at = node * NODE_WORDS;
      const first = words[at + NODE_FIRST];
      const total = q * words[at + NODE_SECOND] + base;
      if (words[at + NODE_SYMBOL] & HAS_RUN) {
        const pool = runs.pool;
        const distinct = pool[first];
        const end = first + distinct;
        let counts = 0;
        let position = first + 1;
        while (position <= end && (pool[position] & mask) !== symbol) {
          counts = (counts + (pool[position++] >>> bits)) | 0;
        }
        if (position <= end) {
          const low = q * counts + p * (position - first - 1);
          tape.put(low, q * (pool[position] >>> bits) + p, total);
          runs.increment(node, position);
        } else {
          let below = 0;
          for (let j = first + 1; j <= end; j++) if ((pool[j] & mask) < symbol) below++;
          tape.put(q * counts + p * (distinct + symbol - below), p, total);
          runs.append(node, symbol);
        }
      } else if (first !== 0) {
        const only = first & mask;
        const count = first >>> bits;
        if (only === symbol) {
          if (this.#alphabetSize > 1) tape.put(0, q * count + p, total);
          runs.incrementOnly(node);
        } else {
          tape.put(q * count + p * (only < symbol ? symbol : symbol + 1), p, total);
          runs.append(node, symbol);
        }
      } else {
        if (this.#alphabetSize > 1) tape.put(p * symbol, p, total);
        runs.append(node, symbol);
      }
      if (total + q > this.#halveAt) this.#settle(node);
      tree.advance(symbol);
    }
  }

  decode(source: IntervalSource, symbols: SymbolArray, from: number, to: number): void {
    if (this.#wide !== undefined) {
      this.#decodeWide(this.#wide, source, symbols, from, to);
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

  #encodeWide(
    wide: WideCounts,
    symbols: SymbolArray,
    from: number,
    to: number,
    tape: IntervalTape,
  ): void {
    const { p, q } = this.#added;
    const base = p * this.#alphabetSize;
    for (let i = from; i < to; i++) {
      const symbol = symbols[i];
      const low = q * wide.sumBelow(symbol) + p * symbol;
      tape.put(low, q * wide.counts[symbol] + p, q * wide.sum + base);
      wide.increment(symbol);
      while (q * wide.sum + base > this.#halveAt) wide.halve();
    }
  }

  #decodeWide(
    wide: WideCounts,
    source: IntervalSource,
    symbols: SymbolArray,
    from: number,
    to: number,
  ): void {
    const { p, q } = this.#added;
    const base = p * this.#alphabetSize;
    for (let i = from; i < to; i++) {
      const symbol = wide.weighed(source.target(q * wide.sum + base), q, p);
      source.take(q * wide.sumBelow(symbol) + p * symbol, q * wide.counts[symbol] + p);
      symbols[i] = symbol;
      wide.increment(symbol);
      while (q * wide.sum + base > this.#halveAt) wide.halve();
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
