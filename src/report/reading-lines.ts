import { byteSizeText } from '../corpus/byte-size.ts';
import type { CorpusRecord, RunRecord } from '../harness/run-record.ts';
import { countText, wrapText } from './figures.ts';

/**
 * What figures of a corpus that was not taken as a whole do not say: read in pieces, or only blocks of it.
 * @param plan  of a run; absent for entropies alone
 */
export function readingLines(
  corpus: CorpusRecord,
  plan: Pick<RunRecord['plan'], 'memory_bytes'> | undefined,
  columns: number,
): string[] {
  const lines: string[] = [];
  if (corpus.sample !== undefined) lines.push(sampleText(corpus.sample));
  if (corpus.in_pieces === true) lines.push(plan === undefined ? COUNTED : codedText(plan));
  return lines.flatMap((line) => wrapText(line, columns - 1, ' '));
}

const COUNTED =
  'Read in pieces: orders above 2 were not counted, so that the floor may lie above what they would say; no match lengths were measured, no order tested for use, no change along the data looked for.';

function codedText({ memory_bytes }: Pick<RunRecord['plan'], 'memory_bytes'>): string {
  const memory = memory_bytes === undefined ? '' : ` to stay within ${byteSizeText(memory_bytes)}`;
  return `Read in pieces${memory}: the floor rests on orders 0 to 2 and on the coders listed, so that it may lie above what all orders would say; no repeats between train and test were looked for, no speed measured, no cost on a device.`;
}

/** `a sample: 14 of 160 blocks, 8.8 % of the bytes`, and what that means for the figures. */
function sampleText({
  blocks,
  of_blocks,
  bytes,
  of_bytes,
}: NonNullable<CorpusRecord['sample']>): string {
  const share = `${Number(((100 * bytes) / of_bytes).toPrecision(2))} %`;
  return `A sample: ${countText(blocks)} of ${countText(of_blocks)} blocks, ${share} of the bytes. Each block is coded as a file of its own. A table that is sent, and what a coder learns, weigh more in a sample than in all the data: such rates are the sample's. Intervals are drawn from whole blocks.`;
}
