import type { CorpusShape } from './corpus-data.ts';
import type { CellBits } from './run-cell.ts';

/** Units of each message of a cell under fill. */
function unitCountsOf({ messageEnds }: CellBits, { test }: CorpusShape): Uint32Array {
  const counts = new Uint32Array(messageEnds.length);
  let unit = 0;
  for (let i = 0; i < counts.length; i++) {
    const from = unit;
    while (unit < test.messageEnds.length && test.messageEnds[unit] <= messageEnds[i]) unit++;
    counts[i] = unit - from;
  }
  return counts;
}

export interface FillFigures {
  readonly unitCount: number;
  /** Units by messages. */
  readonly mean: number;
  /** Fewest units of a message, the last of the corpus left out, which may be short; unless it is the only one. */
  readonly min: number;
}

/** How full a cell made its messages; undefined where there is no message. */
export function fillFigures(bits: CellBits, corpus: CorpusShape): FillFigures | undefined {
  const counts = unitCountsOf(bits, corpus);
  if (counts.length === 0) return undefined;
  let min = counts[0];
  for (let i = 1; i < counts.length - 1; i++) min = Math.min(min, counts[i]);
  const unitCount = corpus.test.messageEnds.length;
  return { unitCount, mean: unitCount / counts.length, min };
}

/**
 * Carried bits of each message of the corpus. Under fill these are units, whose cells cut different messages: the bits of a
 * message, padding and all, are spread evenly over its units, so that cells can be compared over the same stretch of source.
 */
export function bitsOfCorpusMessages(bits: CellBits, corpus: CorpusShape): Float64Array {
  if (corpus.fill === undefined) return bits.messageBits;
  const spread = new Float64Array(corpus.test.messageEnds.length);
  let unit = 0;
  unitCountsOf(bits, corpus).forEach((count, i) => {
    spread.fill(bits.messageBits[i] / count, unit, unit + count);
    unit += count;
  });
  return spread;
}
