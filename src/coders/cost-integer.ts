import { OperationTally } from '../models/counting-tally.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Setup, TablePolicy } from './contract.ts';
import { type BothEnds, type EndCost, type EndOperations, endCost } from './cost.ts';
import { startMean } from './integer-encoder.ts';
import type { IntegerFamily } from './integer-family.ts';
import { integerTables } from './integer-tables.ts';

/** Bytes that a decoder looks at to find the end of a run of zeros. */
export const INTEGER_WINDOW_BYTES = 4;

/** Accumulator or window of 32 bits, its bit count and a position of 4 bytes. */
const STATE_BYTES = 9;
/** Sum and count of a running mean. */
const MEAN_BYTES = 8;

/**
 * Costs of an integer code. Its parameter is one byte of flash, or under `learned` and `primed` a running mean, whose first
 * values take as many bytes of flash as of RAM. Undefined under `sent`, whose encoder counts symbols.
 */
export function integerCosts(policy: TablePolicy): BothEnds<EndCost> | undefined {
  if (policy === 'sent') return undefined;
  const adapts = policy === 'learned' || policy === 'primed';
  const flashBytes = adapts ? MEAN_BYTES : 1;
  const stateBytes = STATE_BYTES + (adapts ? MEAN_BYTES : 0);
  const more = adapts ? 8 : 0;
  return {
    encoder: endCost(flashBytes, stateBytes, { statements: 14 + more, nestedCalls: 2 }),
    decoder: endCost(flashBytes, stateBytes, { statements: 16 + more, nestedCalls: 2 }),
  };
}

/**
 * Counts the words of a sequence, and where the parameter adapts its rule and the mean's update (whether it is halved).
 * Undefined under `sent`.
 * @param given  the parameter, where the candidate gives it
 */
export function integerOperations(
  family: IntegerFamily,
  { symbols, messageEnds }: SymbolSequence,
  setup: Setup,
  given: number | undefined,
): EndOperations | undefined {
  const { policy, reset } = setup;
  if (policy === 'sent') return undefined;
  const encoder = new OperationTally();
  const decoder = new OperationTally();
  const adapts = given === undefined && policy !== 'shipped';
  const mean = adapts ? startMean(family, setup) : undefined;
  let parameter = adapts ? 0 : (given ?? integerTables(family, setup).parameter);
  let from = 0;
  for (const to of messageEnds) {
    if (reset === 'message') mean?.restart();
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
