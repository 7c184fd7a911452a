import type { SymbolArray } from '../symbols/sequence.ts';
import type { IntervalSink, IntervalSource } from './interval.ts';
import type { MemoryBound } from './memory-bound.ts';

/**
 * A probability model of symbols, the same at both ends: what it does for a symbol depends only on the symbols before.
 *
 * The intervals it gives keep the promises of interval.ts.
 */
export interface SymbolModel {
  /** Begins a reset unit: the trained or empty state, and the contexts of a message's start. */
  reset(): void;
  /** Gives the intervals of `symbols[from … to − 1]` to the sink. */
  encode(symbols: SymbolArray, from: number, to: number, sink: IntervalSink): void;
  /** Decodes `symbols[from … to − 1]`. */
  decode(source: IntervalSource, symbols: SymbolArray, from: number, to: number): void;
}

/** An adaptive model, which can be trained, copied, and made to return to a state. */
export interface AdaptiveModel extends SymbolModel {
  /** What its growing arrays are counted against. */
  readonly memory: MemoryBound;
  /** Contexts of a message's start; what was learned stays. */
  startContexts(): void;
  /** Makes the present counts the state that `reset` returns to. Until then `reset` only starts the contexts. */
  markResetState(): void;
  /** A copy that shares nothing and has no reset state yet. */
  clone(): AdaptiveModel;
}
