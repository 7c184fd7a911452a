import type { Setup } from '../coders/contract.ts';
import type { CorpusShape } from './corpus-data.ts';

/**
 * What every setup of a corpus says, tables apart: the record, how the plan codes its fields, and filling are the corpus's, so
 * that cells, and figures about cells, cannot differ in them.
 */
export function setupBase(
  corpus: CorpusShape,
  policy: Setup['policy'],
  reset: Setup['reset'],
  align: number,
): Setup {
  const { alphabetSize, lengths, record, fields, fill } = corpus;
  return {
    policy,
    alphabetSize,
    reset,
    lengths,
    align,
    ...(record === undefined ? {} : { record }),
    ...(fields === undefined ? {} : { fields }),
    ...(fill === undefined ? {} : { fill: { bytes: fill.bytes } }),
    ...(fill?.unitSymbols === undefined ? {} : { unitSymbols: fill.unitSymbols }),
  };
}
