import type { AddedCount } from './additive-model.ts';
import {
  type ContextTree,
  NODE_PARENT,
  NODE_SECOND,
  NODE_SYMBOL,
  NODE_WORDS,
  SYMBOL_MASK,
} from './context-tree.ts';
import { Quantiser } from './quantise.ts';

/**
 * What becomes of a symbol that its context has not seen:
 * - `escape`: an escape of weight q, the number of distinct symbols seen (method C), to the context one shorter, without exclusion
 *   (which keeps a device's decoder simple); below the empty context all m symbols are equally likely. A context that saw
 *   the whole alphabet has no escape; one that was never trained falls to the shorter one free of charge.
 * - `{ add }`: weights q·c + p for every symbol of the alphabet, order k only; uniform in a context never trained.
 * - `none`: it cannot occur (tables fitted to what is coded).
 */
export type Unseen = 'escape' | 'none' | { readonly add: AddedCount };

/** `bits`: every context's frequencies quantised to a total of 2^bits. `exact`: the weights themselves, for prices. */
export type TableTotal = { readonly bits: number } | 'exact';

/**
 * Frequencies of a static order-k model, laid out so that one state, the longest known context, is enough to code.
 *
 * Contexts are numbered; the first `positions` are the empty ones, one for each position of a symbol. Entries of context i are `entryStart[i] … entryStart[i + 1] − 1`, by
 * symbol. With `unseen: none` or `add`, only contexts of full length have intervals; the shorter ones lead to them.
 */
export interface StaticTable {
  readonly alphabetSize: number;
  readonly order: number;
  readonly positions: number;
  readonly unseen: Unseen;
  readonly entryStart: Uint32Array;
  readonly symbols: Uint32Array;
  readonly lows: Numbers;
  readonly frequencies: Numbers;
  /** Longest known context after this entry. */
  readonly next: Uint32Array;
  /** The context without its oldest symbol. */
  readonly suffix: Uint32Array;
  /** Symbols in the context. */
  readonly length: Uint8Array;
  readonly totals: Numbers;
  /** Where the interval of the escape, or of all unseen symbols, begins; equals the total when there is none. */
  readonly unseenFrom: Numbers;
  /** Weight of one unseen symbol, under `add`. */
  readonly unseenFrequency: Numbers;
  /** The context of a message's start. */
  readonly startContext: number;
}

/** 32-bit integers, or larger ones where weights are exact. */
type Numbers = Uint32Array | Float64Array;

/** Children of each node, by symbol: `children[starts[node] … starts[node + 1] − 1]`, strings that occurred only. */
export function childrenOf(tree: ContextTree): { starts: Uint32Array; children: Uint32Array } {
  const { words, nodeCount } = tree;
  const starts = new Uint32Array(nodeCount + 1);
  for (let node = 1; node < nodeCount; node++) {
    const at = node * NODE_WORDS;
    if (words[at + NODE_SECOND] > 0) starts[words[at + NODE_PARENT] + 1]++;
  }
  for (let i = 1; i < starts.length; i++) starts[i] += starts[i - 1];
  const children = new Uint32Array(starts[nodeCount]);
  const fill = starts.slice();
  for (const node of nodesBySymbol(tree, children.length)) {
    children[fill[words[node * NODE_WORDS + NODE_PARENT]]++] = node;
  }
  return { starts, children };
}

/** The nodes that occurred, by their symbol. */
function nodesBySymbol(tree: ContextTree, total: number): Uint32Array {
  const { words, nodeCount, alphabetSize } = tree;
  const sorted = new Uint32Array(total);
  const symbolOf = (node: number) => words[node * NODE_WORDS + NODE_SYMBOL] & SYMBOL_MASK;
  const occurred = (node: number) => words[node * NODE_WORDS + NODE_SECOND] > 0;
  if (total < alphabetSize / 8) {
    let count = 0;
    for (let node = 1; node < nodeCount; node++) if (occurred(node)) sorted[count++] = node;
    return sorted.sort((a, b) => symbolOf(a) - symbolOf(b) || a - b);
  }
  const places = new Uint32Array(alphabetSize + 1);
  for (let node = 1; node < nodeCount; node++) if (occurred(node)) places[symbolOf(node) + 1]++;
  for (let i = 1; i < places.length; i++) places[i] += places[i - 1];
  for (let node = 1; node < nodeCount; node++) {
    if (occurred(node)) sorted[places[symbolOf(node)]++] = node;
  }
  return sorted;
}

/** Each node's string without its oldest symbol; 0 for the empty strings. A parent and every suffix come before a node. */
export function suffixesOf(tree: ContextTree): Uint32Array {
  const { words, nodeCount, positions } = tree;
  const suffix = new Uint32Array(nodeCount);
  for (let node = positions; node < nodeCount; node++) {
    const at = node * NODE_WORDS;
    const parent = words[at + NODE_PARENT];
    suffix[node] =
      parent < positions
        ? tree.nextRoot(parent)
        : tree.find(suffix[parent], words[at + NODE_SYMBOL] & SYMBOL_MASK);
  }
  return suffix;
}

/**
 * Makes the table of a tree of strings of up to `order` + 1 symbols whose second words are counts.
 * @param countOf  what a count is taken for
 */
export function compileTable(
  tree: ContextTree,
  order: number,
  unseen: Unseen,
  total: TableTotal,
  countOf: (count: number) => number = (count) => count,
): StaticTable {
  const { words, nodeCount, alphabetSize, positions } = tree;
  const { starts, children } = childrenOf(tree);
  const suffix = suffixesOf(tree);
  const length = new Uint8Array(nodeCount);
  for (let node = positions; node < nodeCount; node++) {
    length[node] = length[words[node * NODE_WORDS + NODE_PARENT]] + 1;
  }
  const symbols = new Uint32Array(children.length);
  const next = new Uint32Array(children.length);
  // One place more than entries, for a context's escape.
  const weights = new Float64Array(children.length + 1);
  const newNumbers = (count: number) =>
    total === 'exact' ? new Float64Array(count) : new Uint32Array(count);
  const frequencies = newNumbers(children.length + 1);
  const lows = newNumbers(children.length);
  for (let i = 0; i < children.length; i++) {
    const node = children[i];
    symbols[i] = words[node * NODE_WORDS + NODE_SYMBOL] & SYMBOL_MASK;
    next[i] = length[node] <= order ? node : suffix[node];
  }
  const totals = newNumbers(nodeCount);
  const unseenFrom = newNumbers(nodeCount);
  const unseenFrequency = newNumbers(nodeCount);
  const quantiser = new Quantiser();
  const add = typeof unseen === 'object' ? unseen.add : undefined;
  for (let context = 0; context < nodeCount; context++) {
    const from = starts[context];
    const to = starts[context + 1];
    if (from === to || (unseen !== 'escape' && length[context] !== order)) continue;
    const distinct = to - from;
    let weight = 0;
    for (let i = from; i < to; i++) {
      const count = countOf(words[children[i] * NODE_WORDS + NODE_SECOND]);
      weights[i] = add === undefined ? count : add.q * count + add.p;
      weight += weights[i];
    }
    let end = to;
    if (unseen === 'escape' && distinct < alphabetSize) {
      // The next context's first entry is written later, so its place can hold the escape meanwhile.
      weights[to] = distinct;
      weight += distinct;
      end = to + 1;
    }
    const rest = add === undefined ? 0 : alphabetSize - distinct;
    if (total === 'exact') {
      for (let i = from; i < end; i++) frequencies[i] = weights[i];
      if (add !== undefined) unseenFrequency[context] = add.p;
      totals[context] = weight + rest * (add?.p ?? 0);
    } else {
      const size = 2 ** total.bits;
      totals[context] = size;
      let each = 0;
      if (add !== undefined && rest > 0) {
        const whole = weight + rest * add.p;
        const fair = Math.floor((2 * size * add.p + whole) / (2 * whole));
        each = Math.max(1, Math.min(fair, Math.floor((size - distinct) / rest)));
        unseenFrequency[context] = each;
      }
      quantiser.quantise(weights, frequencies, from, end, size - rest * each);
    }
    let low = 0;
    for (let i = from; i < to; i++) {
      lows[i] = low;
      low += frequencies[i];
    }
    unseenFrom[context] = low;
  }
  return {
    alphabetSize,
    order,
    positions,
    unseen,
    entryStart: starts,
    symbols,
    lows,
    frequencies: frequencies.subarray(0, children.length),
    next,
    suffix,
    length,
    totals,
    unseenFrom,
    unseenFrequency,
    startContext: tree.startNode(order),
  };
}
