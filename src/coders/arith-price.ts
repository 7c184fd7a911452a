import { empiricalLengthBits } from '../models/empirical-length.ts';
import { PairTree } from '../models/pair-tree.ts';
import { StaticModel } from '../models/static-model.ts';
import { compileTable } from '../models/static-table.ts';
import type { SymbolModel } from '../models/symbol-model.ts';
import { Meter } from '../stages/meter.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { ArithSettings } from './arith-settings.ts';
import { adaptiveModelFor, startsAtMessages, tablesFor } from './arith-tables.ts';
import type { Price, Setup } from './contract.ts';

/**
 * Code lengths by the same model code as the encoder's, into a meter; static tables enter with their raw counts instead
 * of quantised frequencies. Without a fit where contexts know positions, so that learning and structure are booked as one.
 */
export function arithPrice(settings: ArithSettings, sequence: SymbolSequence, setup: Setup): Price {
  const { symbols, messageEnds, alphabetSize } = sequence;
  const { order, positions } = settings;
  const meter = new Meter();
  const ownPairs =
    setup.policy === 'sent' && setup.reset === 'message'
      ? new PairTree(alphabetSize, order, positions)
      : undefined;
  let model = ownPairs === undefined ? pricedModel(settings, setup) : undefined;
  const messageIdealBits = new Float64Array(messageEnds.length);
  let idealBits = 0;
  let from = 0;
  for (let i = 0; i < messageEnds.length; i++) {
    const to = messageEnds[i];
    if (ownPairs !== undefined) {
      ownPairs.clear();
      ownPairs.count(symbols, from, to);
      model = new StaticModel(compileTable(ownPairs.tree, order, 'none', 'exact'));
    } else if (startsAtMessages(setup)) {
      model!.reset();
    }
    model!.encode(symbols, from, to, meter);
    messageIdealBits[i] = meter.takeBits();
    idealBits += messageIdealBits[i];
    from = to;
  }
  // The model's memory may go before the counting takes its own.
  model = undefined;
  // Whether one distribution for each context and position is estimable, entropy by order alone cannot judge.
  if (positions > 1) return { idealBits, messageIdealBits };
  const bits = empiricalLengthBits(sequence, order, startsAtMessages(setup));
  return { idealBits, messageIdealBits, fit: { bits, of: { order } } };
}

/** A model with raw counts in place of quantised frequencies. */
export function pricedModel(settings: ArithSettings, setup: Setup): SymbolModel {
  const { order } = settings;
  if (setup.policy === 'shipped') {
    const { pairs } = tablesFor(setup, 'shipped');
    return new StaticModel(compileTable(pairs.tree, order, settings.unseen, 'exact'));
  }
  if (setup.policy === 'sent') {
    const { pairs } = tablesFor(setup, 'sent');
    return new StaticModel(compileTable(pairs.tree, order, 'none', 'exact'));
  }
  return adaptiveModelFor(settings, setup);
}
