import type { CorpusShape } from './corpus-data.ts';
import type { CellBits } from './run-cell.ts';

/** What a link charges for that bills each message by whole steps. */
export interface BillingFigures {
  readonly stepBytes: number;
  readonly steps: number;
  /** Steps by messages of the source, or by units where messages are filled; 0 where there is none. */
  readonly stepsPerUnit: number;
  /** Share of the billed bytes that carry nothing; 0 where nothing is billed. */
  readonly unusedShare: number;
}

/**
 * Each message is billed by itself, rounded up to whole steps; an alphabet map that is sent once, as a message of its own.
 * A message of no bits costs nothing: what the link adds to each, headers and the like, it knows itself.
 * @param stepBytes  ≥ 1
 */
export function billingFigures(
  { messageBits, mapBits, totals }: CellBits,
  corpus: CorpusShape,
  stepBytes: number,
): BillingFigures {
  const stepBits = 8 * stepBytes;
  let steps = Math.ceil(mapBits / stepBits);
  for (const bits of messageBits) steps += Math.ceil(bits / stepBits);
  const unitCount = corpus.test.messageEnds.length;
  return {
    stepBytes,
    steps,
    stepsPerUnit: unitCount === 0 ? 0 : steps / unitCount,
    unusedShare: steps === 0 ? 0 : 1 - totals.carriedBits / (steps * stepBits),
  };
}
