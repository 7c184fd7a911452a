import type { SymbolArray, SymbolChunk } from '../symbols/sequence.ts';
import { ContextTree, NODE_SECOND, NODE_WORDS } from './context-tree.ts';

/**
 * Exact counts of every symbol in every context of order 0 … k: the tree of all strings of up to k + 1 symbols, the last
 * of which was coded. The second word of a string's node is how often it occurred, up to 2^32 − 1.
 *
 * Contexts begin with the start value where {@link start} was called, and run on otherwise.
 */
export class PairTree {
  readonly order: number;
  readonly tree: ContextTree;

  constructor(alphabetSize: number, order: number) {
    this.order = order;
    this.tree = new ContextTree(alphabetSize, order + 1);
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

  constructor(alphabetSize: number, order: number, startAtMessages: boolean) {
    this.pairs = new PairTree(alphabetSize, order);
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
