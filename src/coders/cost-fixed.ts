import { OperationTally } from '../models/counting-tally.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import { type BothEnds, type EndCost, type EndOperations, endCost } from './cost.ts';

/** An accumulator of 32 bits, its bit count and a position of 4 bytes. */
const STATE_BYTES = 9;

/** Words of one length: no tables; shift in and flush, or refill, shift out and check. */
export function fixedCosts(): BothEnds<EndCost> {
  return {
    encoder: endCost(0, STATE_BYTES, { statements: 6, nestedCalls: 1 }),
    decoder: endCost(0, STATE_BYTES, { statements: 8, nestedCalls: 1 }),
  };
}

/** By the path that needs no table: the encoder decides nothing, the decoder whether a symbol lies in the alphabet. */
export function fixedOperations({ symbols }: SymbolSequence): EndOperations {
  const encoder = new OperationTally();
  const decoder = new OperationTally();
  for (let i = 0; i < symbols.length; i++) {
    decoder.branches += 1;
    encoder.close();
    decoder.close();
  }
  return { encoder: encoder.counts(), decoder: decoder.counts() };
}
