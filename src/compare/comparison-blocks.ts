import { normalShareBelow, studentQuantile } from '../statistics/normal-law.ts';
import { intoBlocks } from '../statistics/paired-difference.ts';

/** What is resampled, and what signs are flipped of. */
export type ComparisonUnit = 'messages' | 'blocks of messages' | 'blocks of units';

/** How the messages of a corpus are put together for comparing its cells. */
export interface ComparisonBlocks {
  readonly count: number;
  readonly unit: ComparisonUnit;
}

/**
 * Neighbouring messages are alike, so that as many units as messages would promise a precision that is not there; from some
 * 10 to 30 long blocks on, more blocks sharpen an interval by little. 24 is also the most whose 2^24 signs can all be tried.
 * Source: Schmeiser, "Batch size effects in the analysis of simulation output", 1982.
 */
export const MOST_BLOCKS = 24;

/** Fewer blocks than this give no interval worth printing. */
export const LEAST_BLOCKS = 8;

/**
 * The blocks that a corpus is compared over: contiguous, in its order, and at most 24; where it has no more messages than
 * that, each message is one.
 *
 * @param messageCount    messages of the corpus, units where messages are filled
 * @param filledMessages  where messages are filled: the fewest messages that one of the cells has. The units of a message
 *   share its bits, so that a block holds two messages or more
 * @param sampleBlocks    of a sample, how many blocks of the files it holds: what was not taken differs from it as they do
 *   from one another, so that nothing smaller may be resampled
 */
export function blocksFor(
  messageCount: number,
  filledMessages?: number,
  sampleBlocks = Number.POSITIVE_INFINITY,
): ComparisonBlocks {
  if (filledMessages !== undefined) {
    return { count: Math.min(MOST_BLOCKS, filledMessages >> 1), unit: 'blocks of units' };
  }
  const most = Math.min(MOST_BLOCKS, sampleBlocks);
  if (messageCount <= most) return { count: messageCount, unit: 'messages' };
  return { count: most, unit: 'blocks of messages' };
}

/** Sums over each of the blocks; `blocks.count` is at least 1. */
export function blockSums(values: Float64Array, blocks: ComparisonBlocks): Float64Array {
  return intoBlocks(values, blocks.count);
}

/**
 * The level at which a percentile interval over `blocks` units keeps 95 %: resamples spread less than the data do, and the
 * normal law is narrower than Student's, both the more the fewer units there are.
 * Source: Hesterberg, "What teachers should know about the bootstrap", 2015, §3.3 (expanded percentile interval).
 */
export function expandedLevel(blocks: number): number {
  const width = Math.sqrt(blocks / (blocks - 1)) * studentQuantile(0.975, blocks - 1);
  return 1 - 2 * normalShareBelow(-width);
}
