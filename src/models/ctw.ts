import type { SymbolArray } from '../symbols/sequence.ts';
import { DECISION_TOTAL, type DecisionSink, type DecisionSource } from './binary-decision.ts';
import { ctwTables, MOST_STEPS, WEIGHT_SHIFT } from './ctw-tables.ts';

/** Most nodes: 192 MiB of them. */
const MOST_NODES = 2 ** 24;
/** Nodes are placed until so much of the table is taken. */
const LOAD = 0.8;
const FEWEST_NODES = 2 ** 12;
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
 * weight from a table, counts of 65 535 are halved. Nodes are told apart by 32 bits of a hash beside their place by
 * another, so two contexts may, very rarely, share a node. When the table is full, paths end where their nodes end.
 *
 * Cost: ⌈log2 m⌉ · (depth + 1) nodes a symbol; 12 bytes a node, 192 MiB at most.
 * Source: F. M. J. Willems, Y. M. Shtarkov, T. J. Tjalkens, "The context-tree weighting method: basic properties", IEEE
 * Trans. IT 41(3), 1995; β: F. M. J. Willems, T. J. Tjalkens, "Complexity reduction of the context-tree weighting
 * algorithm", 1997 (from memory).
 */
export class CtwModel {
  readonly #width: number;
  readonly #depth: number;
  readonly #mask: number;
  readonly #room: number;
  readonly #marks: Uint32Array;
  /** Ones in the upper half, zeros in the lower. */
  readonly #counts: Uint32Array;
  /** log2 β, in 1/65536 bit. */
  readonly #odds: Int32Array;
  readonly #placeHash: Int32Array;
  readonly #markHash: Int32Array;
  /** Nodes of the bit in hand by context length, their own probabilities of a 1, and those of their longer contexts. */
  readonly #path: Int32Array;
  readonly #own: Int32Array;
  readonly #longer: Int32Array;
  readonly #costs: Uint32Array;
  readonly #weights: Uint32Array;
  #longest = 0;
  #nodes = 0;

  /**
   * @param depth    longest context, in symbols
   * @param symbols  how many will be coded, the same at both ends: sizes the table
   */
  constructor(alphabetSize: number, depth: number, symbols: number) {
    this.#width = alphabetSize < 2 ? 0 : 32 - Math.clz32(alphabetSize - 1);
    this.#depth = depth;
    const wanted = (symbols * this.#width * (depth + 1)) / LOAD;
    let size = FEWEST_NODES;
    while (size < wanted && size < MOST_NODES) size *= 2;
    this.#mask = size - 1;
    this.#room = Math.floor(size * LOAD);
    this.#marks = new Uint32Array(size);
    this.#counts = new Uint32Array(size);
    this.#odds = new Int32Array(size);
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
    const path = this.#path;
    const depth = this.#depth;
    let longest = 0;
    for (; longest <= depth; longest++) {
      const node = this.#nodeOf(longest, prefix);
      if (node < 0) break;
      path[longest] = node;
    }
    longest--;
    this.#longest = longest;
    const counts = this.#counts;
    const odds = this.#odds;
    const weights = this.#weights;
    let ones = DECISION_TOTAL / 2;
    for (let j = longest; j >= 0; j--) {
      const node = path[j];
      const count = counts[node];
      const own = krichevskyTrofimov(count >>> 16, count & 0xffff);
      this.#own[j] = own;
      if (j === longest) {
        ones = own;
        continue;
      }
      this.#longer[j] = ones;
      const step = odds[node] >> WEIGHT_SHIFT;
      const weight = weights[MOST_STEPS + Math.min(MOST_STEPS, Math.max(-MOST_STEPS, step))];
      ones = Math.floor((weight * own + (DECISION_TOTAL - weight) * ones) / DECISION_TOTAL);
    }
    return ones;
  }

  #learn(bit: number): void {
    const costs = this.#costs;
    const longest = this.#longest;
    for (let j = longest; j >= 0; j--) {
      const node = this.#path[j];
      if (j < longest) {
        const own = this.#own[j];
        const longer = this.#longer[j];
        const gain =
          bit === 1
            ? costs[longer] - costs[own]
            : costs[DECISION_TOTAL - longer] - costs[DECISION_TOTAL - own];
        const odds = this.#odds[node] + gain;
        this.#odds[node] = Math.min(LARGEST_ODDS, Math.max(-LARGEST_ODDS, odds));
      }
      this.#count(node, bit);
    }
  }

  #count(node: number, bit: number): void {
    const count = this.#counts[node];
    let ones = count >>> 16;
    let zeros = count & 0xffff;
    if (bit === 1) ones++;
    else zeros++;
    if (ones >= LARGEST_COUNT || zeros >= LARGEST_COUNT) {
      ones = (ones + 1) >>> 1;
      zeros = (zeros + 1) >>> 1;
    }
    this.#counts[node] = ones * 0x10000 + zeros;
  }

  /** The node of the last `length` symbols and the bits so far, made if there is room; −1 if there is none. */
  #nodeOf(length: number, prefix: number): number {
    let place = Math.imul(this.#placeHash[length] + prefix, 0x2c1b3c6d);
    place = Math.imul(place ^ (place >>> 13), 0x297a2d39);
    let mark = Math.imul(this.#markHash[length] ^ Math.imul(prefix, 0x27d4eb2f), 0x165667b1);
    mark = (mark ^ (mark >>> 16)) >>> 0;
    // 0 marks an empty place.
    if (mark === 0) mark = 1;
    const marks = this.#marks;
    const mask = this.#mask;
    let at = (place ^ (place >>> 15)) & mask;
    for (;;) {
      const found = marks[at];
      if (found === mark) return at;
      if (found === 0) break;
      at = (at + 1) & mask;
    }
    if (this.#nodes >= this.#room) return -1;
    this.#nodes++;
    marks[at] = mark;
    return at;
  }
}

/** (ones + ½) ÷ (ones + zeros + 1) in 65536ths, 1 … 65 535. */
function krichevskyTrofimov(ones: number, zeros: number): number {
  const exact = Math.floor(((2 * ones + 1) * DECISION_TOTAL) / (2 * (ones + zeros) + 2));
  return Math.min(DECISION_TOTAL - 1, Math.max(1, exact));
}
