import { oneMessage, type SymbolSequence, sliceMessages } from '../symbols/sequence.ts';
import type { Cell } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import { runCell } from './run-cell.ts';

/** Symbols of each side that a cell is tried on. */
const SAMPLE_SYMBOLS = 8192;
/** Cells tried at most, spread over the list, and seconds after which no further one is. */
const SAMPLE_CELLS = 40;
const SAMPLE_SECONDS = 2;

/** The first messages up to about {@link SAMPLE_SYMBOLS}, or the start of a first message that is longer. */
function beginningOf(sequence: SymbolSequence): SymbolSequence {
  const { symbols, messageEnds, alphabetSize } = sequence;
  if (symbols.length <= SAMPLE_SYMBOLS) return sequence;
  let messages = 0;
  while (messages < messageEnds.length && messageEnds[messages] <= SAMPLE_SYMBOLS) messages++;
  if (messages === 0) return oneMessage(symbols.subarray(0, SAMPLE_SYMBOLS), alphabetSize);
  return sliceMessages(sequence, 0, messages);
}

function beginningOfCorpus(corpus: CorpusData): CorpusData {
  const test = beginningOf(corpus.test);
  return {
    ...corpus,
    test,
    ...(corpus.train === undefined ? {} : { train: beginningOf(corpus.train) }),
    testFiles: [{ path: '', sha256: '', messageEnd: test.messageEnds.length }],
  };
}

/**
 * A guess at how long cells will take, timing apart: some are run on the beginning of their data and scaled by symbols.
 * Data that look like noise slow an adaptive coder down as its tables grow, so the guess can be low by a small factor there.
 * @returns seconds
 */
export async function estimateSeconds(
  cells: readonly Cell[],
  corpora: readonly CorpusData[],
): Promise<number> {
  const samples = new Map(corpora.map((c) => [c.key, { whole: c, part: beginningOfCorpus(c) }]));
  const start = performance.now();
  const stride = Math.max(1, Math.ceil(cells.length / SAMPLE_CELLS));
  let tried = 0;
  let seconds = 0;
  for (let i = 0; i < cells.length; i += stride) {
    const { whole, part } = samples.get(cells[i].dataKey)!;
    const before = performance.now();
    await runCell(cells[i], part, async () => {});
    const scale =
      (whole.test.symbols.length + (whole.train?.symbols.length ?? 0)) /
      Math.max(1, part.test.symbols.length + (part.train?.symbols.length ?? 0));
    seconds += ((performance.now() - before) / 1000) * scale;
    tried++;
    if ((performance.now() - start) / 1000 > SAMPLE_SECONDS) break;
  }
  return tried === 0 ? 0 : (seconds / tried) * cells.length;
}
