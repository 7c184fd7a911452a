import type { SymbolArray } from '../symbols/sequence.ts';
import { DECISION_TOTAL, type DecisionSink, type DecisionSource } from './binary-decision.ts';
import { ctwTables, MOST_STEPS, WEIGHT_SHIFT } from './ctw-tables.ts';

/** Words of a node: two hashes of what it stands for, its counts (ones in the upper half), log2 β in 1/65536 bit. */
const MARK = 0;
const PLACE = 1;
const COUNTS = 2;
const ODDS = 3;
const NODE_WORDS_SHIFT = 2;
/** Nodes of the first table, and of the largest: 256 MiB, and half of that beside it while it grows. */
const FEWEST_NODES = 2 ** 14;
const MOST_NODES = 2 ** 24;
/** The share of a table that is taken before it grows or, at its largest, takes no more. */
const LOAD = 0.75;
/** A count of this size halves both counts of its node. */
const LARGEST_COUNT = 0xffff;
/** Log-odds stay inside ± this, in 1/65536 bit. */
const LARGEST_ODDS = 2 ** 30;

/**
 * Context-tree weighting over symbols: each symbol is decided bit by bit, most significant first, and each bit has the
 * mixture over all context lengths 0 … `depth` (in symbols) that the tree of its contexts defines.
 *
 * Every node, a context with the bits of the symbol decided so far, holds Krichevsky–Trofimov counts, and log2 of β, the
 * probability of its own estimate by that of its longer contexts; along one path the weighted probability of a bit is
 * (β · own + longer) ÷ (β + 1), and β then grows by own ÷ longer. For an alphabet of 2 this is the binary method of the paper.
 *
 * What differs from the paper, alike at both ends: probabilities are 65536ths (1 … 65 535), log2 β is in 1/65536 bit and its
 * weight from a table, counts of 65 535 are halved. Nodes are told apart by 64 bits of hashes, so two contexts may share a
 * node, once in 10^5 corpora or so. When the largest table is full, paths end where their nodes end.
 *
 * Cost: ⌈log2 m⌉ · (depth + 1) nodes a symbol; 21 to 43 bytes a node, 384 MiB at most.
 * Source: F. M. J. Willems, Y. M. Shtarkov, T. J. Tjalkens, "The context-tree weighting method: basic properties", IEEE
 * Trans. IT 41(3), 1995; β: F. M. J. Willems, T. J. Tjalkens, "Complexity reduction of the context-tree weighting
 * algorithm", 1997 (from memory).
 */
export class CtwModel {
  readonly #width: number;
  readonly #depth: number;
  readonly #mostNodes: number;
  #words = new Int32Array(FEWEST_NODES << NODE_WORDS_SHIFT);
  #mask = FEWEST_NODES - 1;
  #room = Math.floor(FEWEST_NODES * LOAD);
  #nodes = 0;
  readonly #placeHash: Int32Array;
  readonly #markHash: Int32Array;
  /** Nodes of the bit in hand by context length, their own probabilities of a 1, and those of their longer contexts. */
  readonly #path: Int32Array;
  readonly #own: Int32Array;
  readonly #longer: Int32Array;
  #longest = 0;
  readonly #costs: Uint32Array;
  readonly #weights: Uint32Array;

  /**
   * @param depth      longest context, in symbols
   * @param mostNodes  a power of two, the same at both ends
   */
  constructor(alphabetSize: number, depth: number, mostNodes = MOST_NODES) {
    this.#width = alphabetSize < 2 ? 0 : 32 - Math.clz32(alphabetSize - 1);
    this.#depth = depth;
    this.#mostNodes = mostNodes;
    this.#placeHash = new Int32Array(depth + 1);
    this.#markHash = new Int32Array(depth + 1);
    this.#path = new Int32Array(depth + 1);
    this.#own = new Int32Array(depth + 1);
    this.#longer = new Int32Array(depth + 1);
    ({ costs: this.#costs, weights: this.#weights } = ctwTables());
    for (let j = 0; j < depth; j++) this.see(alphabetSize);
  }

  /** Moves the contexts on by a symbol that is not coded. */
  see(symbol: number): void {
    const place = this.#placeHash;
    const mark = this.#markHash;
    for (let j = this.#depth; j > 0; j--) {
      const a = Math.imul(place[j - 1] ^ (symbol + 1), 0x9e3779b1);
      place[j] = (a ^ (a >>> 15)) + j;
      const b = Math.imul(mark[j - 1] ^ (symbol + 1), 0x85ebca6b);
      mark[j] = (b ^ (b >>> 13)) + j;
    }
  }

  encode(symbols: SymbolArray, from: number, to: number, sink: DecisionSink): void {
    const width = this.#width;
    for (let i = from; i < to; i++) {
      const symbol = symbols[i];
      let prefix = 1;
      for (let shift = width - 1; shift >= 0; shift--) {
        const bit = (symbol >>> shift) & 1;
        sink.put(bit, this.#predict(prefix));
        this.#learn(bit);
        prefix = prefix * 2 + bit;
      }
      this.see(symbol);
    }
  }

  decode(source: DecisionSource, symbols: SymbolArray, from: number, to: number): void {
    const width = this.#width;
    const leading = 2 ** width;
    for (let i = from; i < to; i++) {
      let prefix = 1;
      for (let shift = width - 1; shift >= 0; shift--) {
        const bit = source.take(this.#predict(prefix));
        this.#learn(bit);
        prefix = prefix * 2 + bit;
      }
      symbols[i] = prefix - leading;
      this.see(prefix - leading);
    }
  }

  /** Probability of a 1 after the symbol's bits so far, which `prefix` holds below a leading 1. */
  #predict(prefix: number): number {
    const depth = this.#depth;
    if (this.#nodes + depth + 1 > this.#room) this.#grow();
    const words = this.#words;
    const path = this.#path;
    let longest = 0;
    for (; longest <= depth; longest++) {
      const node = this.#nodeOf(words, longest, prefix);
      if (node < 0) break;
      path[longest] = node;
    }
    longest--;
    this.#longest = longest;
    const ownOnes = this.#own;
    const longerOnes = this.#longer;
    const weights = this.#weights;
    let ones = DECISION_TOTAL / 2;
    for (let j = longest; j >= 0; j--) {
      const node = path[j];
      const counts = words[node + COUNTS];
      const own = krichevskyTrofimov(counts >>> 16, counts & 0xffff);
      ownOnes[j] = own;
      longerOnes[j] = ones;
      if (j === longest) {
        ones = own;
        continue;
      }
      const step = words[node + ODDS] >> WEIGHT_SHIFT;
      const weight = weights[MOST_STEPS + Math.min(MOST_STEPS, Math.max(-MOST_STEPS, step))];
      // Below 2^32, so the unsigned shift is the exact floor.
      ones = (weight * own + (DECISION_TOTAL - weight) * ones) >>> 16;
    }
    return ones;
  }

  /** Lets every node of the path know the bit. */
  #learn(bit: number): void {
    const words = this.#words;
    const path = this.#path;
    const ownOnes = this.#own;
    const longerOnes = this.#longer;
    const costs = this.#costs;
    const longest = this.#longest;
    for (let j = 0; j <= longest; j++) {
      const node = path[j];
      if (j < longest) {
        const own = bit === 1 ? ownOnes[j] : DECISION_TOTAL - ownOnes[j];
        const longer = bit === 1 ? longerOnes[j] : DECISION_TOTAL - longerOnes[j];
        const odds = words[node + ODDS] + costs[longer] - costs[own];
        words[node + ODDS] = Math.min(LARGEST_ODDS, Math.max(-LARGEST_ODDS, odds));
      }
      const counts = words[node + COUNTS];
      let ones = (counts >>> 16) + bit;
      let zeros = (counts & 0xffff) + 1 - bit;
      if (ones >= LARGEST_COUNT || zeros >= LARGEST_COUNT) {
        ones = (ones + 1) >>> 1;
        zeros = (zeros + 1) >>> 1;
      }
      words[node + COUNTS] = (ones << 16) | zeros;
    }
  }

  /** Offset of the node of the last `length` symbols and the bits so far, made if there is room; −1 if there is none. */
  #nodeOf(words: Int32Array, length: number, prefix: number): number {
    let place = Math.imul(this.#placeHash[length] + prefix, 0x2c1b3c6d);
    place = Math.imul(place ^ (place >>> 13), 0x297a2d39);
    place ^= place >>> 15;
    let mark = Math.imul(this.#markHash[length] ^ Math.imul(prefix, 0x27d4eb2f), 0x165667b1);
    mark ^= mark >>> 16;
    // 0 marks an empty place.
    if (mark === 0) mark = 1;
    const mask = this.#mask;
    let slot = place & mask;
    for (;;) {
      const node = slot << NODE_WORDS_SHIFT;
      const found = words[node + MARK];
      if (found === mark && words[node + PLACE] === place) return node;
      if (found === 0) break;
      slot = (slot + 1) & mask;
    }
    if (this.#nodes >= this.#room) return -1;
    this.#nodes++;
    const node = slot << NODE_WORDS_SHIFT;
    words[node + MARK] = mark;
    words[node + PLACE] = place;
    return node;
  }

  /** Twice the table, if it is not the largest yet. */
  #grow(): void {
    const old = this.#words;
    const size = 2 * (this.#mask + 1);
    if (size > this.#mostNodes) return;
    const words = new Int32Array(size << NODE_WORDS_SHIFT);
    const mask = size - 1;
    for (let from = 0; from < old.length; from += 1 << NODE_WORDS_SHIFT) {
      if (old[from + MARK] === 0) continue;
      let slot = old[from + PLACE] & mask;
      while (words[(slot << NODE_WORDS_SHIFT) + MARK] !== 0) slot = (slot + 1) & mask;
      const to = slot << NODE_WORDS_SHIFT;
      words[to + MARK] = old[from + MARK];
      words[to + PLACE] = old[from + PLACE];
      words[to + COUNTS] = old[from + COUNTS];
      words[to + ODDS] = old[from + ODDS];
    }
    this.#words = words;
    this.#mask = mask;
    this.#room = Math.floor(size * LOAD);
  }
}

/** (ones + ½) ÷ (ones + zeros + 1) in 65536ths, 1 … 65 535. */
function krichevskyTrofimov(ones: number, zeros: number): number {
  const exact = Math.floor(((2 * ones + 1) * DECISION_TOTAL) / (2 * (ones + zeros) + 2));
  return Math.min(DECISION_TOTAL - 1, Math.max(1, exact));
}
