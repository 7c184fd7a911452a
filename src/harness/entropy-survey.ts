import { blockView } from '../entropy/block-view.ts';
import { resolvedDifference, symbolsToResolve } from '../entropy/data-needed.ts';
import { rateByTrainingSize, timedParts, trainToTest } from '../entropy/data-needed-training.ts';
import type { EntropyByOrder } from '../entropy/entropy-by-order.ts';
import { extrapolate } from '../entropy/extrapolation.ts';
import { BitassayError } from '../errors/errors.ts';
import type { CorpusData } from './corpus-data.ts';
import {
  blockRecord,
  extrapolationRecord,
  trainingRecord,
  trainToTestRecord,
} from './entropy-record.ts';
import type { EntropyRecord } from './run-record.ts';

/** Highest order that is trained to see what more training data save. */
const HIGHEST_TRAINED_ORDER = 4;

export interface SurveyOptions {
  /** Also figures that are not shown unless asked for. */
  readonly all: boolean;
  /** Leave out what trains a coder. */
  readonly rough: boolean;
  /** Difference in bits per symbol that is to be resolved. */
  readonly difference: number;
}

type Survey = Partial<
  Pick<
    EntropyRecord,
    'extrapolation' | 'block_view' | 'train_to_test' | 'training_sizes' | 'resolution'
  >
>;

/**
 * What an entropy report says beside orders, floor and drift: how much data is needed, what age does to tables, and, where asked
 * for, extrapolation and the block view.
 */
export async function entropySurvey(
  corpus: CorpusData,
  entropy: EntropyByOrder,
  options: SurveyOptions,
  pause: () => Promise<void>,
): Promise<Survey> {
  const survey: { -readonly [K in keyof Survey]: Survey[K] } = {};
  const { test } = corpus;
  if (options.all) {
    const found = extrapolate(entropy.orders);
    if (found !== undefined) survey.extrapolation = extrapolationRecord(found);
    await pause();
    survey.block_view = blockRecord(blockView(test));
  }
  const order = entropy.orders.findLast((o) => o.useful === true)?.k;
  const saving = order === undefined ? undefined : entropy.orders[order].saving;
  if (order !== undefined && saving !== undefined && Number.isFinite(saving.standardError)) {
    survey.resolution = {
      order,
      symbols: saving.symbols,
      standard_error: saving.standardError,
      least_difference: resolvedDifference(saving),
      difference: options.difference,
      needed_symbols: symbolsToResolve(saving, options.difference),
    };
  }
  if (options.rough) return survey;
  const parts = timedParts(test, corpus.train);
  const heldOut = {
    order: Math.min(HIGHEST_TRAINED_ORDER, order ?? 0),
    contexts: entropy.contexts,
  };
  try {
    await pause();
    const found = trainToTest(parts, heldOut);
    if (found !== undefined) survey.train_to_test = trainToTestRecord(found);
    await pause();
    const sizes = rateByTrainingSize(parts, heldOut);
    if (sizes !== undefined) survey.training_sizes = trainingRecord(sizes);
  } catch (error) {
    // A model that meets its memory bound leaves these lines out; the floor does not rest on them.
    if (!(error instanceof BitassayError)) throw error;
  }
  return survey;
}
