import { OperationTally } from '../models/counting-tally.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Setup } from './contract.ts';
import { type BothEnds, type EndCost, type EndOperations, endCost, integerBytes } from './cost.ts';
import { MEASURED, measuredCosts } from './cost-measured.ts';
import { SymbolCounts } from './huffman-counts.ts';
import { startMean } from './integer-encoder.ts';
import type { IntegerFamily } from './integer-family.ts';
import { integerTables } from './integer-tables.ts';

/** Bytes that a decoder looks at to find the end of a run of zeros. */
export const INTEGER_WINDOW_BYTES = 4;

/** Accumulator or window of 32 bits, its bit count and a position of 4 bytes. */
const STATE_BYTES = 9;
/** Sum and count of a running mean. */
const MEAN_BYTES = 8;

/** What the search for a parameter takes: count, weigh each one. */
const CHOICE_STATEMENTS = 40;

/**
 * Costs of an integer code. Trained or given, its parameter is part of the code. Under `learned` and `primed` there is a running
 * mean, whose first values take as many bytes of flash as of RAM. Under `sent` it is one byte of RAM, and the encoder counts symbols: by symbol
 * a count as wide as the most symbols that share a parameter need, and the list of those seen.
 */
export function integerCosts(
  name: IntegerFamily['name'],
  { policy, reset, alphabetSize, lengths }: Setup,
  { messageEnds }: SymbolSequence,
): BothEnds<EndCost> {
  if (policy === 'sent') {
    let mostSymbols = 0;
    messageEnds.forEach((end, i) => {
      const from = i === 0 || reset === 'never' ? 0 : messageEnds[i - 1];
      mostSymbols = Math.max(mostSymbols, end - from);
    });
    const countBytes = alphabetSize * (integerBytes(mostSymbols) + integerBytes(alphabetSize - 1));
    return {
      encoder: endCost(0, STATE_BYTES + 1 + countBytes, {
        statements: 14 + CHOICE_STATEMENTS,
        nestedCalls: 2,
      }),
      decoder: endCost(0, STATE_BYTES + 1, { statements: 18, nestedCalls: 2 }),
    };
  }
  if (policy === 'learned' || policy === 'primed') {
    const stateBytes = STATE_BYTES + MEAN_BYTES;
    return {
      encoder: endCost(MEAN_BYTES, stateBytes, { statements: 22, nestedCalls: 2 }),
      decoder: endCost(MEAN_BYTES, stateBytes, { statements: 24, nestedCalls: 2 }),
    };
  }
  return measuredCosts(MEASURED[name], lengths, { encoder: 0, decoder: 0 });
}

/**
 * Counts the words of a sequence, and where the parameter adapts its rule and the mean's update (whether it is halved).
 * Where parameters are sent, what choosing them takes is not among the counts.
 * @param given  the parameter, where the candidate gives it
 */
export function integerOperations(
  family: IntegerFamily,
  { symbols, messageEnds }: SymbolSequence,
  setup: Setup,
  given: number | undefined,
): EndOperations {
  const { policy, reset, alphabetSize } = setup;
  const encoder = new OperationTally();
  const decoder = new OperationTally();
  const adapts = given === undefined && (policy === 'learned' || policy === 'primed');
  const fitsEach = given === undefined && policy === 'sent' && reset === 'message';
  const mean = adapts ? startMean(family, setup) : undefined;
  let parameter = adapts || fitsEach ? 0 : (given ?? integerTables(family, setup).parameter);
  const chooser = family.chooser();
  const counts = new SymbolCounts(fitsEach ? alphabetSize : 0);
  let from = 0;
  for (const to of messageEnds) {
    if (reset === 'message') mean?.restart();
    if (fitsEach) {
      counts.clear();
      counts.add(symbols, from, to);
      parameter = chooser.choose(counts).parameter;
    }
    for (let i = from; i < to; i++) {
      if (mean !== undefined) {
        family.countAdapting(mean, encoder);
        parameter = family.countAdapting(mean, decoder);
        encoder.branches += 1;
        decoder.branches += 1;
        mean.add(symbols[i]);
      }
      family.countWord(symbols[i], parameter, encoder, decoder);
      encoder.close();
      decoder.close();
    }
    from = to;
  }
  return { encoder: encoder.counts(), decoder: decoder.counts() };
}
