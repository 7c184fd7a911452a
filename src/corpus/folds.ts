import { InputError } from '../errors/errors.ts';
import { newSymbolArray, type SymbolSequence } from '../symbols/sequence.ts';
import { type Corpus, firstAbove } from './corpus.ts';
import type { SplitRule, SplitShape } from './decide-split.ts';

/**
 * How a corpus is parted into contiguous blocks, each of which is the test part once while all others are the train part.
 *
 * Cutting by symbols makes two messages of one that lies across a cut; so `messageEnds` and `fileEnds` here are those of the
 * corpus with all cuts. Within a fold only the cuts around its block count.
 */
export interface FoldCuts {
  readonly messageEnds: Uint32Array;
  /** Messages here whose ends are cuts and no ends of the corpus. */
  readonly added: ReadonlySet<number>;
  readonly fileEnds: Uint32Array;
  /** Message at which each block begins, and at last the number of messages: one entry more than there are folds. */
  readonly cuts: Uint32Array;
}

/** The two parts of one fold. */
export interface Fold {
  /**
   * In a circle: from just after the block to the end of the corpus, then from its beginning up to the block. What came
   * right before the block thus comes last, as it would for a product whose tables were trained lately.
   */
  readonly train: SymbolSequence;
  readonly test: SymbolSequence;
  /** In messages of `test`; one entry for each file of the corpus. */
  readonly testFileEnds: Uint32Array;
}

/** ⌊i · count / folds⌋ for i = 0 … folds: blocks of equal size, to one thing. */
function evenCuts(count: number, folds: number): Uint32Array {
  return Uint32Array.from({ length: folds + 1 }, (_, i) => Math.floor((i * count) / folds));
}

function symbolAt(messageEnds: Uint32Array, message: number): number {
  return message === 0 ? 0 : messageEnds[message - 1];
}

/**
 * Parts a corpus into `folds` blocks of as many messages (`by` message, unit), files or symbols (block) each as goes. Under
 * fill, cuts by symbols move up to the end of a unit.
 * @throws InputError when there are fewer things than blocks, or a block would hold no symbol
 */
export function foldCuts(shape: SplitShape, by: SplitRule['by'], folds: number): FoldCuts {
  const { messageEnds, fileEnds } = shape;
  const symbolCount = symbolAt(messageEnds, messageEnds.length);
  const byBlock = by === 'block';
  const count = byBlock ? symbolCount : by === 'file' ? fileEnds.length : messageEnds.length;
  const thing = byBlock ? 'symbol' : by === 'file' ? 'file' : shape.fill ? 'unit' : 'message';
  const even = evenCuts(count, folds);
  const added: ReadonlySet<number> = new Set();
  let result: FoldCuts;
  if (by === 'file') {
    const cuts = even.map((file) => (file === 0 ? 0 : fileEnds[file - 1]));
    result = { messageEnds, added, fileEnds, cuts };
  } else if (!byBlock) result = { messageEnds, added, fileEnds, cuts: even };
  else if (shape.fill !== undefined) {
    const cuts = even.map((cut, i) => {
      if (i === folds) return messageEnds.length;
      return cut === 0 ? 0 : firstAbove(messageEnds, cut - 1) + 1;
    });
    result = { messageEnds, added, fileEnds, cuts };
  } else result = cutMessages(messageEnds, fileEnds, even);
  for (let i = 0; i < folds; i++) {
    const from = symbolAt(result.messageEnds, result.cuts[i]);
    if (symbolAt(result.messageEnds, result.cuts[i + 1]) > from) continue;
    throw new InputError(
      `the corpus ${shape.name} cannot be parted into ${folds} blocks: block ${i + 1} would hold no symbols`,
      {
        key: 'split.folds',
        expected: `at least one ${thing} with symbols in each block`,
        got: `${count} ${thing}${count === 1 ? '' : 's'}`,
        advice: byBlock
          ? 'Use fewer folds, or name more data.'
          : 'Use fewer folds, or by: block, which cuts the symbols themselves.',
      },
    );
  }
  return result;
}

/** Message ends with the cuts between symbols added; a cut where a message ends anyway adds none. */
function cutMessages(
  messageEnds: Uint32Array,
  fileEnds: Uint32Array,
  symbolCuts: Uint32Array,
): FoldCuts {
  const ends = new Uint32Array(messageEnds.length + symbolCuts.length);
  const cuts = new Uint32Array(symbolCuts.length);
  const newFileEnds = new Uint32Array(fileEnds.length);
  const added = new Set<number>();
  let count = 0;
  let cut = 1;
  let file = 0;
  for (let message = 0; message < messageEnds.length; message++) {
    const end = messageEnds[message];
    while (file < fileEnds.length && fileEnds[file] <= message) newFileEnds[file++] = count;
    for (; cut < symbolCuts.length && symbolCuts[cut] < end; cut++) {
      // No end of its own where fewer symbols than blocks let cuts coincide.
      if (symbolCuts[cut] > (count === 0 ? 0 : ends[count - 1])) {
        added.add(count);
        ends[count++] = symbolCuts[cut];
      }
      cuts[cut] = count;
    }
    ends[count++] = end;
    for (; cut < symbolCuts.length && symbolCuts[cut] === end; cut++) cuts[cut] = count;
  }
  while (file < fileEnds.length) newFileEnds[file++] = count;
  // Empty messages at the very end belong to the last block.
  cuts[cuts.length - 1] = count;
  return { messageEnds: ends.slice(0, count), added, fileEnds: newFileEnds, cuts };
}

/** First symbol of each part of a fold's train part, and one past its last, in the order of the corpus. */
export function trainRanges(
  { messageEnds, cuts }: FoldCuts,
  fold: number,
): { starts: Uint32Array; ends: Uint32Array } {
  const last = symbolAt(messageEnds, messageEnds.length);
  return {
    starts: Uint32Array.of(0, symbolAt(messageEnds, cuts[fold + 1])),
    ends: Uint32Array.of(symbolAt(messageEnds, cuts[fold]), last),
  };
}

/** The folds of a corpus. All share one array of twice its symbols. */
export function foldsOf(corpus: Pick<Corpus, 'sequence'>, parted: FoldCuts): Fold[] {
  const { alphabetSize, symbols } = corpus.sequence;
  const { messageEnds, added, fileEnds, cuts } = parted;
  const size = symbols.length;
  const circle = newSymbolArray(alphabetSize, 2 * size);
  circle.set(symbols);
  circle.set(symbols, size);
  const stretch = (from: number, to: number): SymbolSequence => {
    const start = atCircle(messageEnds, from, size);
    const ends = new Uint32Array(to - from);
    let count = 0;
    for (let message = from; message < to; message++) {
      if (added.has(message % messageEnds.length) && message !== to - 1) continue;
      ends[count++] = atCircle(messageEnds, message + 1, size) - start;
    }
    return {
      alphabetSize,
      symbols: circle.subarray(start, start + (count === 0 ? 0 : ends[count - 1])),
      messageEnds: ends.slice(0, count),
    };
  };
  return Array.from({ length: cuts.length - 1 }, (_, i) => ({
    train: stretch(cuts[i + 1], messageEnds.length + cuts[i]),
    test: stretch(cuts[i], cuts[i + 1]),
    testFileEnds: fileEnds.map((end) => Math.min(Math.max(end, cuts[i]), cuts[i + 1]) - cuts[i]),
  }));
}

/** One past the last symbol before a message of the circle, whose messages go around. */
function atCircle(messageEnds: Uint32Array, message: number, size: number): number {
  const around = message > messageEnds.length;
  return around
    ? size + messageEnds[message - messageEnds.length - 1]
    : symbolAt(messageEnds, message);
}
