import type { Coder } from '../coders/contract.ts';
import { type ContextScope, countContexts } from '../models/context-counts.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import { estimableOrders } from './estimable.ts';
import { simpleInterval } from './interval.ts';
import { millerMadow } from './miller-madow.ts';
import { plugIn } from './plug-in.ts';
import { usefulOrders } from './useful.ts';

/** Entropy given k predecessors. Rates are in bits per symbol. */
export interface OrderEntropy {
  readonly k: number;
  /** Positions with k predecessors. */
  readonly positions: number;
  readonly contexts: number;
  readonly pairs: number;
  readonly plugIn: number;
  /** Plug-in plus the Miller–Madow term. */
  readonly corrected: number;
  /** 95 % interval around `corrected`; keeps its promise only where the order is estimable. */
  readonly low: number;
  readonly high: number;
  readonly estimable: boolean;
  readonly estimableReason: string;
  /** Undefined: not tested. */
  readonly useful: boolean | undefined;
  readonly usefulReason: string;
}

export interface EntropyByOrder {
  readonly contexts: ContextScope;
  readonly symbolCount: number;
  readonly alphabetSize: number;
  /** Shape [upto + 1], by order. */
  readonly orders: readonly OrderEntropy[];
  /** −1 where not even order 0 is estimable. */
  readonly largestEstimable: number;
}

export interface EntropyOptions {
  readonly upto: number;
  readonly contexts: ContextScope;
  /** Also test which orders are useful; costs far more time than the rest. */
  readonly useful?: boolean;
  /** For that test; back-off `arith` when absent. */
  readonly coderOf?: (order: number) => Coder;
  readonly memoryBytes?: number;
  readonly progress?: (step: 'count' | 'useful', done: number, total: number) => void;
}

/**
 * Conditional entropies of orders 0 … `upto`, with what can be said of each.
 * @throws InputError for an order out of range; LimitError where counting would not fit the memory
 */
export function entropyByOrder(sequence: SymbolSequence, options: EntropyOptions): EntropyByOrder {
  const { upto, contexts, progress } = options;
  const counts = countContexts(sequence, {
    upto,
    contexts,
    ...(options.memoryBytes === undefined ? {} : { memoryBytes: options.memoryBytes }),
    progress: (done, total) => progress?.('count', done, total),
  });
  const plugIns = counts.map((c) => plugIn.estimate(c));
  const verdicts = estimableOrders(counts.map((c, k) => ({ ...c, entropyBits: plugIns[k] })));
  const useful =
    options.useful === true
      ? usefulOrders(sequence, {
          upto,
          contexts,
          ...(options.coderOf === undefined ? {} : { coderOf: options.coderOf }),
          progress: (done, total) => progress?.('useful', done, total),
        })
      : undefined;
  const orders = counts.map((c, k): OrderEntropy => {
    const corrected = millerMadow.estimate(c);
    return {
      k,
      positions: c.positions,
      contexts: c.contexts,
      pairs: c.pairs,
      plugIn: plugIns[k],
      corrected,
      ...simpleInterval(c, corrected, sequence.alphabetSize),
      estimable: verdicts[k].estimable,
      estimableReason: verdicts[k].reason,
      useful: useful?.[k].useful,
      usefulReason: useful?.[k].reason ?? 'not tested: not asked for',
    };
  });
  return {
    contexts,
    symbolCount: sequence.symbols.length,
    alphabetSize: sequence.alphabetSize,
    orders,
    largestEstimable: orders.findLastIndex((order) => order.estimable),
  };
}
