import { BugError } from '../errors/errors.ts';
import { newSymbolArray, type SymbolSequence } from '../symbols/sequence.ts';
import type { Corpus } from './corpus.ts';
import type { Split, SplitSide } from './decide-split.ts';
import { repeatedMessages } from './repeated-messages.ts';

/** Both sides as sequences, and how far they repeat one another. */
export interface SplitCorpus {
  readonly train: SymbolSequence;
  readonly test: SymbolSequence;
  /** In messages of `train`; one entry for each file of the corpus. */
  readonly trainFileEnds: Uint32Array;
  readonly testFileEnds: Uint32Array;
  /** For each message of a side, the message of the corpus that it is, or that it is a part of. */
  readonly trainMessageIndexes: Uint32Array;
  readonly testMessageIndexes: Uint32Array;
  /** For each test message 1 when the same symbols are also a train message, else 0. */
  readonly repeated: Uint8Array;
  /** Mean of `repeated`, 0 … 1. */
  readonly repeatedShare: number;
}

/** The symbols of one side; neighbouring pieces share the corpus's memory, others are copied. */
function sequenceOf(sequence: SymbolSequence, side: SplitSide): SymbolSequence {
  const { alphabetSize, symbols: all } = sequence;
  const { starts, ends } = side;
  const count = starts.length;
  const messageEnds = new Uint32Array(count);
  let total = 0;
  for (let i = 0; i < count; i++) {
    total += ends[i] - starts[i];
    messageEnds[i] = total;
  }
  if (count > 0 && ends[count - 1] - starts[0] === total)
    return { alphabetSize, symbols: all.subarray(starts[0], ends[count - 1]), messageEnds };
  const symbols = newSymbolArray(alphabetSize, total);
  let at = 0;
  for (let i = 0; i < count; i++) {
    // A loop, since a typed array view for each of a million short messages would cost more.
    for (let j = starts[i]; j < ends[i]; j++) symbols[at++] = all[j];
  }
  return { alphabetSize, symbols, messageEnds };
}

/**
 * The train and test parts of a corpus.
 * @param split  decided on the same corpus (or on the raw one behind it)
 */
export function splitCorpus(corpus: Corpus, split: Split): SplitCorpus {
  const train = sequenceOf(corpus.sequence, split.train);
  const test = sequenceOf(corpus.sequence, split.test);
  if (train.symbols.length + test.symbols.length !== corpus.sequence.symbols.length)
    throw new BugError('a split does not belong to the corpus it is applied to');
  const repeated = repeatedMessages(train, test);
  let repeatedCount = 0;
  for (let i = 0; i < repeated.length; i++) repeatedCount += repeated[i];
  return {
    train,
    test,
    trainFileEnds: split.train.fileEnds,
    testFileEnds: split.test.fileEnds,
    trainMessageIndexes: split.train.messageIndexes,
    testMessageIndexes: split.test.messageIndexes,
    repeated,
    repeatedShare: repeatedCount / repeated.length,
  };
}
