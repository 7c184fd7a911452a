import type { SymbolArray, SymbolChunk } from '../symbols/sequence.ts';
import { type ContextHead, ContextTree, NODE_SECOND, NODE_WORDS } from './context-tree.ts';

/**
 * Exact counts of every symbol in every context of order 0 … k: the tree of all strings of up to k + 1 symbols, the last
 * of which was coded. The second word of a string's node is how often it occurred, up to 2^32 − 1.
 *
 * Contexts begin with the start value where {@link start} was called, and run on otherwise.
 */
export class PairTree {
  readonly order: number;
  readonly tree: ContextTree;
  readonly #running: ContextHead;

  /** @param positions  N: contexts know the position modulo N, from {@link start} on; 1: they do not */
  constructor(alphabetSize: number, order: number, positions = 1) {
    this.order = order;
    this.tree = new ContextTree(alphabetSize, order + 1, positions);
    this.#running = this.tree.startHead();
  }

  get alphabetSize(): number {
    return this.tree.alphabetSize;
  }

  /** A message starts: contexts of start values. */
  start(): void {
    this.tree.start();
  }

  count(symbols: SymbolArray, from: number, to: number): void {
    const tree = this.tree;
    const contexts = tree.contexts;
    for (let i = from; i < to; i++) {
      tree.advance(symbols[i]);
      const words = tree.words;
      for (let j = 1; j < contexts.length; j++) words[contexts[j] * NODE_WORDS + NODE_SECOND]++;
    }
  }

  /**
   * Counts one of the first symbols of a unit in the contexts that reach over the unit's start, beside its running ones.
   * @param head    where the contexts from the unit's start stand; moved on
   * @param place   of the symbol in its unit, from 0
   */
  countFromStart(head: ContextHead, symbol: number, place: number): void {
    const tree = this.tree;
    const running = tree.saveContexts(this.#running);
    tree.restoreContexts(head);
    tree.advance(symbol);
    const { contexts, words } = tree;
    for (let j = place + 2; j < contexts.length; j++)
      words[contexts[j] * NODE_WORDS + NODE_SECOND]++;
    tree.saveContexts(head);
    tree.restoreContexts(running);
  }

  /** Forgets everything; cost by what was counted since the last time. */
  clear(): void {
    this.tree.truncate(0);
    this.tree.start();
  }
}

/** Counts the symbols of chunks; with `startAtMessages`, each message begins with start contexts, else only the first. */
export class PairTrainer {
  readonly pairs: PairTree;
  readonly #startAtMessages: boolean;

  constructor(alphabetSize: number, order: number, startAtMessages: boolean, positions = 1) {
    this.pairs = new PairTree(alphabetSize, order, positions);
    this.#startAtMessages = startAtMessages;
  }

  push(chunk: SymbolChunk): void {
    let from = 0;
    for (const to of chunk.messageEnds) {
      this.pairs.count(chunk.symbols, from, to);
      if (this.#startAtMessages) this.pairs.start();
      from = to;
    }
    this.pairs.count(chunk.symbols, from, chunk.symbols.length);
  }
}

/**
 * Counts the symbols of chunks whose messages are units, several of which make a message: every symbol in its running
 * contexts, and each unit's first k symbols besides in those contexts of a message's start that reach over the unit's.
 */
export class UnitPairTrainer {
  readonly pairs: PairTree;
  readonly #start: ContextHead;
  readonly #head: ContextHead;
  /** Symbols of the unit so far. The first unit runs on from a start as it is, so it has no head. */
  #place = Number.POSITIVE_INFINITY;

  constructor(alphabetSize: number, order: number, positions = 1) {
    this.pairs = new PairTree(alphabetSize, order, positions);
    this.#start = this.pairs.tree.startHead();
    this.#head = this.pairs.tree.startHead();
  }

  push(chunk: SymbolChunk): void {
    let from = 0;
    for (const to of chunk.messageEnds) {
      this.#count(chunk.symbols, from, to);
      this.#head.contexts.set(this.#start.contexts);
      this.#head.last = this.#start.last;
      this.#place = 0;
      from = to;
    }
    this.#count(chunk.symbols, from, chunk.symbols.length);
  }

  #count(symbols: SymbolArray, from: number, to: number): void {
    let at = from;
    for (; at < to && this.#place < this.pairs.order; at++, this.#place++) {
      // The running contexts first: a node comes after those of its suffixes.
      this.pairs.count(symbols, at, at + 1);
      this.pairs.countFromStart(this.#head, symbols[at], this.#place);
    }
    this.pairs.count(symbols, at, to);
  }
}
