import { MOST_COUNTED_BLOCKS } from '../models/context-counts.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';

/** What is resampled for an interval: contiguous units, which the counting of contexts takes for its blocks. */
export interface IntervalUnits {
  /** Shape [1 … 256]: the index one past each unit's last symbol. */
  readonly ends: Uint32Array;
  /** How many of what, as in "64 blocks of messages"; to be printed beside an interval. */
  readonly text: string;
  /** Neighbours are taken for independent. */
  readonly independent: boolean;
}

/** Fewer units than this say too little of their own spread. */
export const FEWEST_UNITS = 30;

/**
 * The units that an interval is drawn from: files where there are {@link FEWEST_UNITS} or more, since what differs between
 * files is what a further file would bring; else blocks of successive messages where there are that many messages; else
 * blocks of successive positions. At most 256 units of about equal numbers of symbols.
 *
 * @param fileEnds  the index one past each file's last symbol; absent where files are unknown
 * @param sampled   the files are blocks of a sample: they are the units however few they are, since what was not taken
 *                  differs from the sample as its blocks do from one another
 */
export function intervalUnits(
  sequence: Pick<SymbolSequence, 'messageEnds'> & { readonly symbols: { readonly length: number } },
  fileEnds?: Uint32Array,
  sampled = false,
): IntervalUnits {
  const symbolCount = sequence.symbols.length;
  if (fileEnds !== undefined) {
    const files = distinctEnds(fileEnds);
    if (files.length >= (sampled ? 2 : FEWEST_UNITS)) {
      const ends = grouped(files, symbolCount);
      const whole = ends.length === files.length;
      return {
        ends,
        text: `${ends.length} ${filesText(sampled, whole)}`,
        independent: whole,
      };
    }
  }
  const messages = distinctEnds(sequence.messageEnds);
  if (messages.length >= FEWEST_UNITS) {
    const ends = grouped(messages, symbolCount);
    if (ends.length >= FEWEST_UNITS) {
      const whole = ends.length === messages.length;
      return {
        ends,
        text: `${ends.length} ${whole ? 'messages' : 'blocks of messages'}`,
        independent: false,
      };
    }
  }
  const count = Math.max(1, Math.min(MOST_COUNTED_BLOCKS, symbolCount));
  const ends = new Uint32Array(count);
  for (let b = 0; b < count; b++) ends[b] = Math.floor(((b + 1) * symbolCount) / count);
  return { ends, text: `${count} blocks of positions`, independent: false };
}

function filesText(sampled: boolean, whole: boolean): string {
  if (sampled) return whole ? 'blocks of the sample' : 'groups of blocks of the sample';
  return whole ? 'files' : 'blocks of files';
}

/** The ends of what is not empty. */
function distinctEnds(ends: Uint32Array): Uint32Array {
  let from = 0;
  return ends.filter((end) => {
    const kept = end > from;
    from = end;
    return kept;
  });
}

/** Ends of groups of successive pieces: all of them where they are few, else those nearest after equal shares of symbols. */
function grouped(ends: Uint32Array, symbolCount: number): Uint32Array {
  if (ends.length <= MOST_COUNTED_BLOCKS) return ends;
  const groups: number[] = [];
  for (const end of ends) {
    const due = ((groups.length + 1) * symbolCount) / MOST_COUNTED_BLOCKS;
    if (end >= due && groups.length < MOST_COUNTED_BLOCKS - 1) groups.push(end);
  }
  if (groups.at(-1) !== symbolCount) groups.push(symbolCount);
  return Uint32Array.from(groups);
}
