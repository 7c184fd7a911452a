import type { CorpusSpec } from '../corpus/corpus.ts';
import { floorShare, type SplitRule } from '../corpus/decide-split.ts';
import {
  openStreamedCorpus,
  type StreamedCorpus,
  type StreamOptions,
} from '../corpus/stream-source.ts';
import { InputError } from '../errors/errors.ts';
import type { SymbolChunk } from '../symbols/sequence.ts';
import type { CorpusShape } from './corpus-data.ts';

/** Successive messages of a streamed corpus. */
export interface MessageRange {
  readonly from: number;
  readonly to: number;
}

/** A corpus that is read in pieces, as cells see it. */
export interface StreamedData {
  readonly shape: CorpusShape;
  readonly train?: MessageRange;
  readonly test: MessageRange;
  /** How often each symbol occurs in all data; shape [alphabetSize]. */
  readonly symbolCounts: Float64Array;
  chunks(range: MessageRange): Generator<SymbolChunk, void, undefined>;
}

/**
 * Reads a corpus once and parts it in time.
 * @param rule  absent: nothing trains and all data are coded
 * @throws InputError for what cannot be streamed
 */
export async function openStreamedData(
  spec: CorpusSpec,
  baseFolder: string,
  rule: SplitRule | undefined,
  options: StreamOptions,
): Promise<StreamedData> {
  const corpus = await openStreamedCorpus(spec, baseFolder, options);
  const count = corpus.messageEnds.length;
  const cut = rule === undefined ? 0 : trainMessages(corpus, rule);
  const test: MessageRange = { from: cut, to: count };
  return {
    shape: shapeOf(corpus, cut),
    ...(rule === undefined ? {} : { train: { from: 0, to: cut } }),
    test,
    symbolCounts: corpus.symbolCounts,
    chunks: ({ from, to }) => corpus.chunks(from, to),
  };
}

/** As `decideSplit` does in time, by message. */
function trainMessages(corpus: StreamedCorpus, rule: SplitRule): number {
  if (rule.by !== 'message' || rule.order !== 'in_time' || rule.folds !== undefined) {
    throw new InputError(
      `the corpus ${corpus.name} is read in pieces, and then split in time by message`,
      {
        key: 'split',
        expected: 'by: message, order: in_time, no folds',
        got: `by: ${rule.by}, order: ${rule.order}${rule.folds === undefined ? '' : `, folds: ${rule.folds}`}`,
        advice: 'Change the split, or allow more memory.',
      },
    );
  }
  const count = corpus.messageEnds.length;
  const cut = floorShare(rule.train, count);
  const symbolsBefore = cut === 0 ? 0 : corpus.messageEnds[cut - 1];
  if (cut >= 1 && cut < count && symbolsBefore > 0 && symbolsBefore < corpus.symbolCount)
    return cut;
  throw new InputError(
    `the corpus ${corpus.name} cannot be split by message: a side would be empty`,
    {
      key: 'split',
      expected: 'at least one message with symbols on each side',
      got: `train: ${rule.train} of ${count} ${count === 1 ? 'message' : 'messages'}`,
      advice: 'Use another share for train, or cut the data into more messages.',
    },
  );
}

function shapeOf(corpus: StreamedCorpus, cut: number): CorpusShape {
  const { alphabetSize, messageEnds, symbolCount } = corpus;
  const start = cut === 0 ? 0 : messageEnds[cut - 1];
  const testEnds = start === 0 ? messageEnds.subarray(cut) : messageEnds.slice(cut);
  if (start > 0) for (let i = 0; i < testEnds.length; i++) testEnds[i] -= start;
  return {
    name: corpus.name,
    key: corpus.name,
    sha256: corpus.sha256,
    symbolsAs: corpus.symbolsAs,
    messagesAs: corpus.messagesAs,
    lengths: corpus.lengths,
    alphabetSize,
    ...(corpus.record === undefined ? {} : { record: corpus.record }),
    sourceBytes: corpus.sourceBytes,
    ...(cut === 0
      ? {}
      : {
          train: {
            alphabetSize,
            symbols: { length: start },
            messageEnds: messageEnds.subarray(0, cut),
          },
        }),
    test: { alphabetSize, symbols: { length: symbolCount - start }, messageEnds: testEnds },
    testFiles: corpus.files.map(({ path, sha256 }, i) => ({
      path,
      sha256,
      messageEnd: Math.max(0, corpus.fileEnds[i] - cut),
    })),
  };
}
