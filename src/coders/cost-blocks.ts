import type { BlockFit } from './block-huffman-tables.ts';
import { type BothEnds, type CodeEstimate, type EndCost, endCost, integerBytes } from './cost.ts';
import { PREFIX_CODE, PREFIX_STATE_BYTES, prefixTableBytes } from './cost-prefix.ts';

/** A prefix code's, with a search among the blocks; or with the cutting of a block into its symbols. */
export const BLOCK_CODE: BothEnds<CodeEstimate> = {
  encoder: { statements: PREFIX_CODE.encoder.statements + 20, nestedCalls: 2 },
  decoder: { statements: PREFIX_CODE.decoder.statements + 16, nestedCalls: 2 },
};

/**
 * Costs of shipped block tables.
 *
 * Both codes lie as prefixTableBytes says. The blocks themselves are lists of n symbols, rising, so that the encoder finds
 * one by halving; the decoder's list holds their numbers, then it reads the symbols. A block and its number are state.
 */
export function blockCosts(fit: BlockFit, n: number, alphabetSize: number): BothEnds<EndCost> {
  const { blocks, tail } = fit;
  const ngrams = fit.escape < 0 ? blocks.count : fit.escape;
  const symbolBytes = integerBytes(alphabetSize - 1);
  const blockBytes = prefixTableBytes(blocks, blocks.count - 1);
  const tailBytes = prefixTableBytes(tail.table, alphabetSize - 1);
  const keyBytes = ngrams * n * symbolBytes;
  const stateBytes = PREFIX_STATE_BYTES + n * symbolBytes + 4;
  return {
    encoder: endCost(
      keyBytes + blockBytes.encoder + tailBytes.encoder,
      stateBytes,
      BLOCK_CODE.encoder,
    ),
    decoder: endCost(
      keyBytes + blockBytes.decoder + tailBytes.decoder,
      stateBytes,
      BLOCK_CODE.decoder,
    ),
  };
}
