import type { BlockFit } from './block-huffman-tables.ts';
import type { Setup } from './contract.ts';
import { type BothEnds, type CodeEstimate, type EndCost, integerBytes } from './cost.ts';
import { MEASURED, measuredCosts } from './cost-measured.ts';
import { PREFIX_CODE, prefixTableBytes } from './cost-prefix.ts';

/** A prefix code's, with a search among the blocks; or with the cutting of a block into its symbols. */
export const BLOCK_CODE: BothEnds<CodeEstimate> = {
  encoder: { statements: PREFIX_CODE.encoder.statements + 20, nestedCalls: 2 },
  decoder: { statements: PREFIX_CODE.decoder.statements + 16, nestedCalls: 2 },
};

/**
 * Costs of shipped block tables.
 *
 * Both codes lie as prefixTableBytes says. A block is one number, its symbols as digits, where 32 bits hold it, else n symbols.
 * The encoder's list of blocks rises, so that it finds one by halving; the decoder's has them in the canonical order of their
 * words, an escape among them, in place of what a code's list would hold.
 */
export function blockCosts(
  fit: BlockFit,
  n: number,
  { alphabetSize, lengths }: Setup,
): BothEnds<EndCost> {
  const { blocks, tail } = fit;
  const ngrams = fit.escape < 0 ? blocks.count : fit.escape;
  const greatest = ngrams === 0 ? 0 : blocks.symbols[ngrams - 1];
  const keyBytes = greatest < 2 ** 32 ? integerBytes(greatest) : n * integerBytes(alphabetSize - 1);
  const blockBytes = prefixTableBytes(blocks, 0);
  const tailBytes = prefixTableBytes(tail.table, alphabetSize - 1);
  return measuredCosts(n === 1 ? MEASURED.blocksOfOne : MEASURED.blocks, lengths, {
    encoder: ngrams * keyBytes + blockBytes.encoder + tailBytes.encoder,
    decoder: blocks.count * keyBytes + blockBytes.decoder + tailBytes.decoder,
  });
}
