import type { BlockEntropy } from '../entropy/block-view.ts';
import type { TrainingSizes, TrainToTest } from '../entropy/data-needed-training.ts';
import type { Drift } from '../entropy/drift.ts';
import type { OrderEntropy } from '../entropy/entropy-by-order.ts';
import type { Extrapolation } from '../entropy/extrapolation.ts';
import type { MatchLengthEntropy } from '../entropy/match-lengths.ts';
import type { EntropyRecord } from './run-record.ts';

/** Figures of the entropy layer in the record's own keys. */

type Part<K extends keyof EntropyRecord> = NonNullable<EntropyRecord[K]>;

export function orderRecord(order: OrderEntropy): EntropyRecord['orders'][number] {
  const { estimates, useful } = order;
  return {
    k: order.k,
    plug_in: order.plugIn,
    corrected: order.corrected,
    low: order.low,
    high: order.high,
    positions: order.positions,
    contexts: order.contexts,
    pairs: order.pairs,
    estimable: order.estimable,
    ...(useful === undefined ? {} : { useful }),
    estimable_reason: order.estimableReason,
    useful_reason: order.usefulReason,
    interval_unit: order.intervalUnit,
    interval_trusted: order.intervalTrusted,
    interval_reason: order.intervalReason,
    ...(estimates === undefined
      ? {}
      : {
          estimates: {
            grassberger: estimates.grassberger,
            chao_shen: estimates.chaoShen,
            ...(estimates.nsb === undefined ? {} : { nsb: estimates.nsb }),
          },
        }),
  };
}

export function matchRecord(matches: MatchLengthEntropy): Part<'match_length'> {
  return {
    rate: matches.bitsPerSymbol,
    low: matches.low,
    high: matches.high,
    valid: matches.valid,
    reason: matches.reason,
    published: matches.publishedBitsPerSymbol,
    lempel_ziv: matches.lempelZivBitsPerSymbol,
    mean_match: matches.meanMatch,
    symbols_used: matches.symbolsUsed,
  };
}

export function extrapolationRecord(found: Extrapolation): Part<'extrapolation'> {
  const { bitsPerSymbol, upto, valid, reason } = found;
  return { rate: bitsPerSymbol, upto, valid, reason };
}

export function blockRecord(view: readonly BlockEntropy[]): Part<'block_view'> {
  return view.map((block) => ({
    n: block.n,
    blocks: block.blocks,
    distinct: block.distinct,
    plug_in: block.plugInPerSymbol,
    corrected: block.correctedPerSymbol,
    ...(block.nsbPerSymbol === undefined ? {} : { nsb: block.nsbPerSymbol }),
    huffman: block.huffmanPerSymbol,
    estimable: block.estimable,
  }));
}

export function driftRecord({ tests, change, windows }: Drift): Part<'drift'> {
  return {
    tests: tests.map(({ order, found, reason }) => ({
      order,
      ...(found === undefined ? {} : { found }),
      reason,
    })),
    ...(change === undefined
      ? {}
      : {
          change: {
            order: change.order,
            at_symbol: change.atSymbol,
            window_symbols: change.windowSymbols,
            further: change.further,
            ...(change.rates === undefined
              ? {}
              : {
                  before: change.rates.before,
                  after: change.rates.after,
                  one_table_cost: change.rates.oneTableCost,
                }),
          },
        }),
    ...(windows === undefined
      ? {}
      : {
          windows: {
            order: windows.order,
            own: windows.rates.map((rate) => rate.own),
            under_all: windows.rates.map((rate) => rate.underAll),
            one_table_cost: windows.oneTableCost,
            standard_error: windows.standardError,
          },
        }),
  };
}

export function trainToTestRecord(found: TrainToTest): Part<'train_to_test'> {
  return {
    order: found.order,
    train_symbols: found.trainSymbols,
    priced_symbols: found.pricedSymbols,
    excess: found.excess,
    standard_error: found.standardError,
  };
}

export function trainingRecord(found: TrainingSizes): Part<'training_sizes'> {
  return {
    order: found.order,
    priced_symbols: found.pricedSymbols,
    sizes: found.sizes.map(({ trainSymbols, rate, saving }) => ({
      train_symbols: trainSymbols,
      rate,
      ...(saving === undefined
        ? {}
        : { saving: saving.rate, standard_error: saving.standardError }),
    })),
    ...(found.enoughSymbols === undefined ? {} : { enough_symbols: found.enoughSymbols }),
  };
}
