import type { Coder } from '../coders/contract.ts';
import { type ContextScope, countContexts, type OrderCounts } from '../models/context-counts.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import { chaoShen } from './chao-shen.ts';
import { estimableOrders } from './estimable.ts';
import { grassberger } from './grassberger.ts';
import { correctedInterval } from './interval.ts';
import { trustIntervals } from './interval-trust.ts';
import { type IntervalUnits, intervalUnits } from './interval-units.ts';
import { millerMadow } from './miller-madow.ts';
import { nsb } from './nsb.ts';
import { plugIn } from './plug-in.ts';
import { type HeldOutSaving, type UsefulVerdict, usefulOrders } from './useful.ts';

/** What further estimators say of the same counts, in bits per symbol. */
export interface FurtherEstimates {
  readonly grassberger: number;
  readonly chaoShen: number;
  /** At order 0 only, with the alphabet's size as the number of cells. */
  readonly nsb?: number;
}

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
  /** 95 % interval around `corrected`; keeps its promise where it is trusted. */
  readonly low: number;
  readonly high: number;
  /** How many of what were resampled for it, as in "64 blocks of messages". */
  readonly intervalUnit: string;
  readonly intervalTrusted: boolean;
  /** Half a sentence. */
  readonly intervalReason: string;
  readonly estimable: boolean;
  readonly estimableReason: string;
  /** Undefined: not tested. */
  readonly useful: boolean | undefined;
  readonly usefulReason: string;
  /** What it saves on held-out data, with its paired standard error; absent where not tested. */
  readonly saving?: HeldOutSaving;
  /** Only where asked for. */
  readonly estimates?: FurtherEstimates;
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
  /** The index one past each file's last symbol; where there are many files, intervals resample them. */
  readonly fileEnds?: Uint32Array;
  /** The files are blocks of a sample: intervals resample them, and no context runs on from one to the next. */
  readonly sampled?: boolean;
  /** The source is known to change along the data, so that no interval is to be trusted. */
  readonly changes?: boolean;
  /** Also the further estimators; they take no second pass over the data. */
  readonly all?: boolean;
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
  const { fileEnds, sampled = false } = options;
  const units = intervalUnits(sequence, fileEnds, sampled);
  const breaks = sampled && fileEnds !== undefined ? { breaks: fileEnds } : {};
  const counts = countContexts(sequence, {
    upto,
    contexts,
    ...breaks,
    blocks: units.ends,
    ...(options.memoryBytes === undefined ? {} : { memoryBytes: options.memoryBytes }),
    progress: (done, total) => progress?.('count', done, total),
  });
  const useful =
    options.useful === true
      ? usefulOrders(sequence, {
          upto,
          contexts,
          ...breaks,
          ...(options.coderOf === undefined ? {} : { coderOf: options.coderOf }),
          progress: (done, total) => progress?.('useful', done, total),
        })
      : undefined;
  return entropyOfCounts(counts, {
    contexts,
    symbolCount: sequence.symbols.length,
    alphabetSize: sequence.alphabetSize,
    units,
    changes: options.changes === true,
    all: options.all === true,
    ...(useful === undefined ? {} : { useful }),
  });
}

/** What entropies need to know beside the counts. */
export interface CountedFacts {
  readonly contexts: ContextScope;
  readonly symbolCount: number;
  readonly alphabetSize: number;
  /** The units that were counted apart. */
  readonly units: IntervalUnits;
  readonly changes: boolean;
  readonly all: boolean;
  readonly useful?: readonly UsefulVerdict[];
}

/** The same from counts that are there already, one entry an order from 0 on. */
export function entropyOfCounts(
  counts: readonly OrderCounts[],
  { contexts, symbolCount, alphabetSize, units, changes, all, useful }: CountedFacts,
): EntropyByOrder {
  const plugIns = counts.map((c) => plugIn.estimate(c));
  const verdicts = estimableOrders(counts.map((c, k) => ({ ...c, entropyBits: plugIns[k] })));
  const intervals = counts.map((c) =>
    correctedInterval(c, millerMadow.estimate(c), alphabetSize, units),
  );
  const trust = trustIntervals(
    intervals.map((interval, k) => ({
      k,
      estimable: verdicts[k].estimable,
      positions: counts[k].positions,
      ...interval,
    })),
    changes,
  );
  const orders = counts.map((c, k): OrderEntropy => {
    const { low, high, intervalUnit } = intervals[k];
    return {
      k,
      positions: c.positions,
      contexts: c.contexts,
      pairs: c.pairs,
      plugIn: plugIns[k],
      corrected: millerMadow.estimate(c),
      low,
      high,
      intervalUnit,
      ...trust[k],
      estimable: verdicts[k].estimable,
      estimableReason: verdicts[k].reason,
      useful: useful?.[k].useful,
      usefulReason: useful?.[k].reason ?? 'not tested: not asked for',
      ...(useful?.[k].saving === undefined ? {} : { saving: useful[k].saving }),
      ...(all ? { estimates: furtherEstimates(c, alphabetSize) } : {}),
    };
  });
  return {
    contexts,
    symbolCount,
    alphabetSize,
    orders,
    largestEstimable: orders.findLastIndex((order) => order.estimable),
  };
}

function furtherEstimates(counts: OrderCounts, alphabetSize: number): FurtherEstimates {
  return {
    grassberger: grassberger.estimate(counts),
    chaoShen: chaoShen.estimate(counts),
    ...(counts.order === 0 ? { nsb: nsb(alphabetSize).estimate(counts) } : {}),
  };
}
