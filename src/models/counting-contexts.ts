import {
  type ContextTree,
  NODE_PARENT,
  NODE_SYMBOL,
  NODE_WORDS,
  SYMBOL_MASK,
} from './context-tree.ts';
import type { OperationTally } from './counting-tally.ts';

/** Slots are at most this full. */
const MOST_FULL = 0.6;

/** Least power of two that keeps so many entries as sparse as slots must be; 0 for none. */
export function slotsFor(entries: number): number {
  let slots = entries === 0 ? 0 : 2;
  while (entries > MOST_FULL * slots) slots *= 2;
  return slots;
}

/** Whether a device finds contexts of one symbol in a table by symbol: where there is one empty context. */
export const isFirstDirect = (positions: number): boolean => positions === 1;

/** Nodes from `from` on that lie in slots. */
export function slottedNodes(tree: ContextTree, from: number): number {
  const { words, nodeCount, positions } = tree;
  const isDirect = isFirstDirect(positions);
  let slotted = 0;
  for (let node = Math.max(from, positions); node < nodeCount; node++)
    if (!isDirect || words[node * NODE_WORDS + NODE_PARENT] >= positions) slotted++;
  return slotted;
}

/**
 * Finds the contexts of a {@link ContextTree} as a device would that has the room which is told of: contexts of one symbol in a
 * table by symbol where positions do not tell them apart, all others by open addressing with exact keys, in the fewest slots
 * that the most contexts ever held need. It counts what that reads and decides, the same at both ends.
 *
 * A context in the table: 1 read, 1 branch (whether it was met). In slots: 2 multiplies for the hash; each slot 1 read and 1
 * branch (whether it is empty); if not, the parent is read and compared, 1 read and 1 branch, and where it agrees the symbol.
 */
export class CountingContexts {
  readonly tree: ContextTree;
  readonly #encoder: OperationTally;
  readonly #decoder: OperationTally;
  readonly #slots: Uint32Array;
  readonly #mask: number;
  /** Slots filled since the start, in order. */
  #filled: Uint32Array;
  #filledCount = 0;
  #marked = 0;

  /**
   * @param tree   at a message's start; changed by {@link advance} alone
   * @param slots  of {@link slotsFor} the most contexts that slots will hold
   */
  constructor(tree: ContextTree, slots: number, encoder: OperationTally, decoder: OperationTally) {
    this.tree = tree;
    this.#encoder = encoder;
    this.#decoder = decoder;
    this.#slots = new Uint32Array(slots);
    this.#mask = slots - 1;
    this.#filled = new Uint32Array(slots);
    const { words, nodeCount, positions } = tree;
    for (let node = positions; node < nodeCount; node++) {
      const parent = words[node * NODE_WORDS + NODE_PARENT];
      if (parent < positions && isFirstDirect(positions)) continue;
      this.#put(
        node,
        this.#emptySlotFor(parent, words[node * NODE_WORDS + NODE_SYMBOL] & SYMBOL_MASK),
      );
    }
  }

  /** Moves every context on by one symbol. */
  advance(symbol: number): void {
    const { tree } = this;
    const { contexts, depth } = tree;
    const lowest = isFirstDirect(tree.positions) ? 1 : 0;
    if (depth > 0 && lowest === 1) this.#count(0, 1, 1);
    // Slots are looked up before the tree makes the nodes that are missing.
    const { nodeCount } = tree;
    for (let j = depth; j > lowest; j--) this.#find(contexts[j - 1], symbol);
    tree.advance(symbol);
    if (tree.nodeCount === nodeCount) return;
    for (let node = nodeCount; node < tree.nodeCount; node++) {
      const parent = tree.words[node * NODE_WORDS + NODE_PARENT];
      if (parent < tree.positions && lowest === 1) continue;
      this.#put(node, this.#emptySlotFor(parent, symbol));
    }
  }

  /** Makes the present contexts those that {@link restore} returns to. */
  mark(): void {
    this.#marked = this.#filledCount;
  }

  /** The tree itself is truncated by its owner. */
  restore(): void {
    // Last in, first out: no probing passes over a slot that was filled later.
    while (this.#filledCount > this.#marked) this.#slots[this.#filled[--this.#filledCount]] = 0;
  }

  #put(node: number, slot: number): void {
    this.#slots[slot] = node;
    this.#filled[this.#filledCount++] = slot;
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

  #hash(parent: number, symbol: number): number {
    const hash = Math.imul(parent, 0x9e3779b1) ^ Math.imul(symbol + 1, 0x85ebca6b);
    return (hash ^ (hash >>> 15)) & this.#mask;
  }

  #find(parent: number, symbol: number): void {
    const slots = this.#slots;
    const words = this.tree.words;
    let slot = this.#hash(parent, symbol);
    let tableReads = 0;
    let branches = 0;
    for (;;) {
      const node = slots[slot];
      tableReads++;
      branches++;
      if (node === 0) break;
      tableReads++;
      branches++;
      if (words[node * NODE_WORDS + NODE_PARENT] === parent) {
        tableReads++;
        branches++;
        if ((words[node * NODE_WORDS + NODE_SYMBOL] & SYMBOL_MASK) === symbol) break;
      }
      slot = (slot + 1) & this.#mask;
    }
    this.#count(2, tableReads, branches);
  }

  #emptySlotFor(parent: number, symbol: number): number {
    let slot = this.#hash(parent, symbol);
    while (this.#slots[slot] !== 0) slot = (slot + 1) & this.#mask;
    return slot;
  }
}
