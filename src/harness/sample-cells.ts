import type { Cell } from './cells.ts';
import type { CorpusShape } from './corpus-data.ts';

/**
 * Why a cell makes no sense on a sample, as a sentence: what it codes would run on over the gaps between blocks, in an order
 * that the files do not have. Undefined where it does.
 */
export function whyNotOnSample(cell: Cell, { sample, testFiles }: CorpusShape): string | undefined {
  if (sample === undefined || testFiles.length < 2) return undefined;
  if (cell.reset === 'message' || cell.reset === 'file') return undefined;
  return `reset ${cell.reset} runs on over the gaps of a sample; take reset message, or file, under which each block is coded by itself`;
}
