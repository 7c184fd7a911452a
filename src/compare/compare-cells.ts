import type { MessagePairs } from '../harness/run-all.ts';
import type { RunRecord } from '../harness/run-record.ts';
import { intoBlocks, pairedDifference } from '../statistics/paired-difference.ts';

/** Cell `b` against cell `a` of the same corpus: how many bits per symbol more it needs. */
export interface Comparison {
  readonly corpus: string;
  readonly a: string;
  readonly b: string;
  /** Bits per symbol, b − a, with a 95 % paired bootstrap interval. */
  readonly difference: number;
  readonly low: number;
  readonly high: number;
  readonly units: number;
  readonly unit: 'messages' | 'blocks of messages' | 'blocks of units';
  /** The interval excludes 0. */
  readonly decided: boolean;
}

/** Above this many messages, contiguous blocks are resampled: neighbours in time are not independent. */
const MOST_UNITS = 256;
/** Fewer units than this give no interval worth printing. */
const LEAST_UNITS = 8;

/**
 * Two cells by their messages.
 * @param filledMessages  where messages are filled, and pairs are of units: the fewest messages that one of the two has. The
 *   units of a message share its bits and are not independent, so contiguous blocks of about two messages are resampled
 * @returns undefined when there are too few messages for an interval
 */
export function compareCells(
  corpus: string,
  a: { readonly id: string; readonly pairs: MessagePairs },
  b: { readonly id: string; readonly pairs: MessagePairs },
  filledMessages?: number,
): Comparison | undefined {
  const messageCount = a.pairs.bits.length;
  const filled = filledMessages !== undefined;
  const most = filled ? Math.min(MOST_UNITS, Math.floor(filledMessages / 2)) : MOST_UNITS;
  if (messageCount !== b.pairs.bits.length || Math.min(messageCount, most) < LEAST_UNITS)
    return undefined;
  const inBlocks = filled || messageCount > most;
  const group = (values: Float64Array): Float64Array =>
    inBlocks ? intoBlocks(values, most) : values;
  const { difference, low, high, units, decided } = pairedDifference({
    bitsA: group(a.pairs.bits),
    bitsB: group(b.pairs.bits),
    symbols: group(a.pairs.symbols),
    seed: 1,
    repetitions: 2000,
  });
  return {
    corpus,
    a: a.id,
    b: b.id,
    difference,
    low,
    high,
    units,
    unit: filled ? 'blocks of units' : inBlocks ? 'blocks of messages' : 'messages',
    decided,
  };
}

/** In each corpus the best cell that is no reference against every other verified one, nearest first. */
export function compareWithBest(
  record: RunRecord,
  messages: ReadonlyMap<string, MessagePairs>,
): Comparison[] {
  const result: Comparison[] = [];
  for (const corpus of record.corpora) {
    const cells = record.cells
      .filter((c) => c.corpus === corpus.name && c.verified && !c.reference)
      .sort((x, y) => x.rate! - y.rate!);
    const best = cells[0];
    const pairs = best === undefined ? undefined : messages.get(best.id);
    if (best === undefined || pairs === undefined) continue;
    for (const cell of cells.slice(1)) {
      const own = messages.get(cell.id);
      const comparison =
        own === undefined
          ? undefined
          : compareCells(
              corpus.name,
              { id: best.id, pairs },
              { id: cell.id, pairs: own },
              cell.unit_count === undefined
                ? undefined
                : Math.min(best.message_count!, cell.message_count!),
            );
      if (comparison !== undefined) result.push(comparison);
    }
  }
  return result;
}
