import { MemoryBound, MODEL_MEMORY_BYTES } from './memory-bound.ts';

/** Node of the empty context; of the one at position 0 where there are several. */
export const ROOT = 0;

/** Words of a node: its parent, its symbol (with a flag above it), and two that belong to the tree's user. */
export const NODE_PARENT = 0;
export const NODE_SYMBOL = 1;
export const NODE_FIRST = 2;
export const NODE_SECOND = 3;
export const NODE_WORDS = 4;

/** The bits of the symbol word that hold the symbol; 0 … 65 536, the start value included. */
export const SYMBOL_MASK = 0x1ffff;

/** Direct tables are used for two symbols when they need no more entries than this. */
const LARGEST_DIRECT = 2 ** 20;
/** From this size on an array grows by half, so that copying it stays below the memory bound. */
const LARGE_ARRAY_WORDS = 2 ** 25;

const NO_WORDS = new Uint32Array(0);

/** Where a reader of symbols stands in a tree. */
export interface ContextHead {
  readonly contexts: Uint32Array;
  last: number;
}

/**
 * All strings of up to `depth` successive symbols that were met, as nodes: contexts, or contexts with the symbol that
 * follows. A node is the string of its parent with one more symbol at the recent end, so the contexts after a symbol are
 * children of the contexts before it, each one longer: one independent look-up for each order.
 *
 * Strings begin with the start value m where a message starts. Where contexts know the position of the next symbol in its
 * record, position modulo N, strings are told apart by the position of their first symbol, and so by that of whatever comes
 * after them: node p < N is the empty context at position p, and the start values before position 0 count backwards.
 *
 * Nodes are found by direct tables for one symbol, and for
 * two while (m + 1)² is small and N is 1, else by open addressing with exact keys. Nodes are numbered in the order they are met:
 * a parent, and every suffix, comes before its children.
 *
 * Memory: 16 bytes a node and 4 to 14 a node for finding it, beside the direct tables.
 */
export class ContextTree {
  readonly alphabetSize: number;
  readonly depth: number;
  /** N ≥ 1: empty contexts there are, one for each position. */
  readonly positions: number;
  readonly memory: MemoryBound;
  /** NODE_WORDS words a node. Replaced when it grows: read it anew after {@link advance}. */
  words: Uint32Array;
  /** Nodes there are, the empty contexts included. */
  nodeCount: number;
  /** Node of the last j symbols, j = 0 … depth; the first is the position too. */
  readonly contexts: Uint32Array;

  readonly #startNodes: Uint32Array;
  readonly #startCount: number;
  readonly #one: Uint32Array;
  readonly #two: Uint32Array;
  /** Node numbers by hash; 0 is empty, since the root is never looked up. */
  #slots: Uint32Array = NO_WORDS;
  #slotMask = 0;
  #hashed = 0;
  #last: number;

  /**
   * @param depth      longest string, in symbols, ≥ 0
   * @param positions  N: contexts know the position modulo N; 1: they do not
   */
  constructor(
    alphabetSize: number,
    depth: number,
    positions = 1,
    memory = new MemoryBound(MODEL_MEMORY_BYTES),
  ) {
    this.alphabetSize = alphabetSize;
    this.depth = depth;
    this.positions = positions;
    this.memory = memory;
    this.nodeCount = positions;
    const width = alphabetSize + 1;
    this.words = memory.grow(NO_WORDS, NODE_WORDS * Math.max(64, 2 * positions));
    for (let root = 1; root < positions; root++) this.words[root * NODE_WORDS + NODE_PARENT] = root;
    const isOneDirect = positions === 1 || positions * width <= LARGEST_DIRECT;
    this.#one = memory.grow(NO_WORDS, depth >= 1 && isOneDirect ? positions * width : 0);
    this.#two = memory.grow(
      NO_WORDS,
      depth >= 2 && positions === 1 && width * width <= LARGEST_DIRECT ? width * width : 0,
    );
    if (depth > 2 || (depth === 2 && this.#two.length === 0) || (depth === 1 && !isOneDirect)) {
      this.#makeSlots(64);
    }
    this.contexts = new Uint32Array(depth + 1);
    this.#last = alphabetSize;
    for (let j = 1; j <= depth; j++) {
      let node = this.#positionBack(j);
      for (let length = 1; length <= j; length++) node = this.#child(node, alphabetSize, length);
      this.contexts[j] = node;
    }
    this.#startNodes = this.contexts.slice();
    this.#startCount = this.nodeCount;
  }

  /** Back to the contexts of a message's start. */
  start(): void {
    const contexts = this.contexts;
    const startNodes = this.#startNodes;
    for (let j = 0; j < contexts.length; j++) contexts[j] = startNodes[j];
    this.#last = this.alphabetSize;
  }

  /** Node of the `length` start values before a message. */
  startNode(length: number): number {
    return this.#startNodes[length];
  }

  /** Nodes of the empty contexts and of start values alone: what a tree that met nothing has. */
  get startCount(): number {
    return this.#startCount;
  }

  /** The empty context one position after that of `root`. */
  nextRoot(root: number): number {
    return root + 1 === this.positions ? ROOT : root + 1;
  }

  /** The contexts of a message's start, apart from the tree's own. */
  startHead(): ContextHead {
    return { contexts: this.#startNodes.slice(), last: this.alphabetSize };
  }

  /** Copies the tree's contexts into `head` and gives it back. */
  saveContexts(head: ContextHead): ContextHead {
    head.contexts.set(this.contexts);
    head.last = this.#last;
    return head;
  }

  restoreContexts(head: ContextHead): void {
    this.contexts.set(head.contexts);
    this.#last = head.last;
  }

  /** Moves every context on by one symbol; strings never met become nodes whose two words are 0. */
  advance(symbol: number): void {
    const contexts = this.contexts;
    if (this.positions > 1) {
      for (let j = this.depth; j > 0; j--) {
        contexts[j] = this.#child(contexts[j - 1], symbol, j);
      }
      contexts[0] = this.nextRoot(contexts[0]);
      this.#last = symbol;
      return;
    }
    let j = this.depth;
    if (j === 0) return;
    const two = this.#two;
    for (const lowest = two.length > 0 ? 2 : 1; j > lowest; j--) {
      contexts[j] = this.#hashedChild(contexts[j - 1], symbol);
    }
    if (j === 2) {
      const known = two[this.#last * (this.alphabetSize + 1) + symbol];
      contexts[2] = known !== 0 ? known : this.#child(contexts[1], symbol, 2);
    }
    const known = this.#one[symbol];
    contexts[1] = known !== 0 ? known : this.#child(ROOT, symbol, 1);
    this.#last = symbol;
  }

  /**
   * For kernels that follow the longest context alone: node after `symbol` is `table[last · width + symbol]`, or not made
   * yet where that is 0. An empty table: the depth is not 1 or 2, the alphabet too large, or N above 1. After following it,
   * {@link moveTo} brings the tree's own contexts up to date.
   */
  longestContexts(): { readonly table: Uint32Array; readonly width: number } {
    if (this.depth === 1 && this.positions === 1) return { table: this.#one, width: 0 };
    return { table: this.depth === 2 ? this.#two : NO_WORDS, width: this.alphabetSize + 1 };
  }

  /** The last symbol, or the start value. */
  get last(): number {
    return this.#last;
  }

  /** Sets the contexts to those after `last`, the longest of which is `node`. */
  moveTo(last: number, node: number): void {
    const contexts = this.contexts;
    contexts[contexts.length - 1] = node;
    if (this.#two.length > 0 && this.depth === 2) contexts[1] = this.#one[last];
    this.#last = last;
  }

  /** The node of `parent` with `symbol` added, or 0 when that string was never met. */
  find(parent: number, symbol: number): number {
    if (parent < this.positions && this.#one.length > 0) {
      return this.#one[parent * (this.alphabetSize + 1) + symbol];
    }
    const words = this.words;
    const at = parent * NODE_WORDS;
    if (this.#two.length > 0 && words[at + NODE_PARENT] === ROOT) {
      return this.#two[(words[at + NODE_SYMBOL] & SYMBOL_MASK) * (this.alphabetSize + 1) + symbol];
    }
    return this.#slots[this.#slotOf(parent, symbol)];
  }

  /** As {@link find}, but makes the node when there is none. */
  add(parent: number, symbol: number): number {
    if (parent < this.positions) return this.#child(parent, symbol, 1);
    const at = parent * NODE_WORDS;
    if (this.words[at + NODE_PARENT] >= this.positions) return this.#child(parent, symbol, 3);
    const last = this.#last;
    this.#last = this.words[at + NODE_SYMBOL] & SYMBOL_MASK;
    const node = this.#child(parent, symbol, 2);
    this.#last = last;
    return node;
  }

  /** Forgets all nodes from `nodeCount` on, newest first; at least the start contexts stay. */
  truncate(nodeCount: number): void {
    const words = this.words;
    const least = Math.max(nodeCount, this.#startCount);
    for (let node = this.nodeCount - 1; node >= least; node--) {
      const at = node * NODE_WORDS;
      const parent = words[at + NODE_PARENT];
      const symbol = words[at + NODE_SYMBOL] & SYMBOL_MASK;
      const parentAt = parent * NODE_WORDS;
      if (parent < this.positions && this.#one.length > 0) {
        this.#one[parent * (this.alphabetSize + 1) + symbol] = 0;
      } else if (this.#two.length > 0 && words[parentAt + NODE_PARENT] === ROOT) {
        const before = words[parentAt + NODE_SYMBOL] & SYMBOL_MASK;
        this.#two[before * (this.alphabetSize + 1) + symbol] = 0;
      } else {
        // Newest first, so nothing that was placed later depends on this slot.
        this.#slots[this.#slotOf(parent, symbol)] = 0;
        this.#hashed--;
      }
    }
    this.nodeCount = least;
  }

  /** A copy that shares nothing, with the same contexts. */
  clone(memory = new MemoryBound(MODEL_MEMORY_BYTES)): ContextTree {
    const copy = new ContextTree(this.alphabetSize, this.depth, this.positions, memory);
    copy.words = memory.grow(this.words, this.words.length);
    copy.nodeCount = this.nodeCount;
    copy.contexts.set(this.contexts);
    copy.#one.set(this.#one);
    copy.#two.set(this.#two);
    if (this.#slots.length > 0) copy.#slots = memory.grow(this.#slots, this.#slots.length);
    copy.#slotMask = this.#slotMask;
    copy.#hashed = this.#hashed;
    copy.#last = this.#last;
    return copy;
  }

  #child(parent: number, symbol: number, length: number): number {
    if (length === 1 && this.#one.length > 0) {
      const index = parent * (this.alphabetSize + 1) + symbol;
      const known = this.#one[index];
      if (known !== 0) return known;
      const node = this.#newNode(parent, symbol);
      this.#one[index] = node;
      return node;
    }
    if (length === 2 && this.#two.length > 0) {
      const index = this.#last * (this.alphabetSize + 1) + symbol;
      const known = this.#two[index];
      if (known !== 0) return known;
      const node = this.#newNode(parent, symbol);
      this.#two[index] = node;
      return node;
    }
    return this.#hashedChild(parent, symbol);
  }

  #hashedChild(parent: number, symbol: number): number {
    const slot = this.#slotOf(parent, symbol);
    const known = this.#slots[slot];
    if (known !== 0) return known;
    const node = this.#newNode(parent, symbol);
    this.#slots[slot] = node;
    if (++this.#hashed > 0.6 * this.#slots.length) this.#makeSlots(this.#slots.length * 2);
    return node;
  }

  /** The slot that holds the string's node, or the empty one where it belongs. */
  #slotOf(parent: number, symbol: number): number {
    const slots = this.#slots;
    const mask = this.#slotMask;
    const words = this.words;
    let slot = Math.imul(parent, 0x9e3779b1) ^ Math.imul(symbol + 1, 0x85ebca6b);
    slot = (slot ^ (slot >>> 15)) & mask;
    for (;;) {
      const node = slots[slot];
      if (node === 0) return slot;
      const at = node * NODE_WORDS;
      if (
        words[at + NODE_PARENT] === parent &&
        (words[at + NODE_SYMBOL] & SYMBOL_MASK) === symbol
      ) {
        return slot;
      }
      slot = (slot + 1) & mask;
    }
  }

  /** The position `distance` before position 0. */
  #positionBack(distance: number): number {
    return (this.positions - (distance % this.positions)) % this.positions;
  }

  #newNode(parent: number, symbol: number): number {
    const node = this.nodeCount++;
    const at = node * NODE_WORDS;
    if (at + NODE_WORDS > this.words.length) {
      const length = this.words.length;
      const more =
        length < LARGE_ARRAY_WORDS ? length : Math.floor(length / 2 / NODE_WORDS) * NODE_WORDS;
      this.words = this.memory.grow(this.words, length + more);
    }
    const words = this.words;
    words[at + NODE_PARENT] = parent;
    words[at + NODE_SYMBOL] = symbol;
    words[at + NODE_FIRST] = 0;
    words[at + NODE_SECOND] = 0;
    return node;
  }

  /** Places all hashed nodes anew, oldest first. */
  #makeSlots(size: number): void {
    this.memory.claim(4 * size);
    const old = this.#slots;
    this.#slots = new Uint32Array(size);
    this.#slotMask = size - 1;
    const words = this.words;
    for (let node = this.positions; old.length > 0 && node < this.nodeCount; node++) {
      const at = node * NODE_WORDS;
      const parent = words[at + NODE_PARENT];
      if (parent < this.positions && this.#one.length > 0) continue;
      if (this.#two.length > 0 && words[parent * NODE_WORDS + NODE_PARENT] === ROOT) continue;
      this.#slots[this.#slotOf(parent, words[at + NODE_SYMBOL] & SYMBOL_MASK)] = node;
    }
    this.memory.release(4 * old.length);
  }
}
