import type { Lengths, Reset } from '../coders/contract.ts';
import type { FillBudget } from '../corpus/messages.ts';
import type { SampleFacts } from '../corpus/sample-rule.ts';
import type { RecordShape } from '../symbols/record.ts';
import { type SymbolSequence, sliceMessages } from '../symbols/sequence.ts';
import type { DataVariation } from './variation.ts';

/** One corpus as cells see it: what trains, what is coded, and what both ends know of it. */
export interface CorpusData {
  readonly name: string;
  /** The name, and what the plan varies of how it is parted or cut: no two data of a run share one. */
  readonly key: string;
  /** What that is; absent where the plan varies nothing of these data. */
  readonly vary?: DataVariation;
  readonly sha256: string;
  readonly symbolsAs: string;
  readonly messagesAs: string;
  /** Symbols of each message but the last of a file, where the framing fixes them. */
  readonly messageSymbols?: number;
  readonly lengths: Lengths;
  readonly alphabetSize: number;
  /** Where the symbols are the bytes of records. */
  readonly record?: RecordShape;
  /** How the fields of the record are coded, where the plan says so. */
  readonly fields?: Readonly<Record<string, string>>;
  /** Cells fill messages themselves: the messages of `train` and `test` are then units. */
  readonly fill?: FillBudget;
  /** Only blocks of the files were read: each stands in the place of a file, and nothing runs on from one to the next. */
  readonly sample?: SampleFacts;
  /** Source bytes behind all symbols, train and test. */
  readonly sourceBytes: number;
  /** Absent where nothing trains: then `test` is all the data. */
  readonly train?: SymbolSequence;
  readonly test: SymbolSequence;
  /** For each file that has messages in `test`: its hash, and the index one past its last message there. */
  readonly testFiles: readonly {
    readonly path: string;
    readonly sha256: string;
    readonly messageEnd: number;
  }[];
  /**
   * The serialised alphabet map, where it was fitted to what is coded and so must be sent once with a cell of policy
   * `sent`, `learned` or `none`; absent where both ends know the alphabet.
   */
  readonly sentMap?: { readonly bytes: Uint8Array; readonly bits: number };
  /** Share of test messages that also occur in train, and which; absent where nothing trains. */
  readonly repeated?: { readonly share: number; readonly mask: Uint8Array };
}

/** A sequence of which the symbols may lie elsewhere. */
export interface SequenceShape extends Omit<SymbolSequence, 'symbols'> {
  readonly symbols: { readonly length: number };
}

/** All of a corpus but its symbols: what figures of cells are made from, also where the corpus is read in pieces. */
export interface CorpusShape extends Omit<CorpusData, 'train' | 'test'> {
  readonly train?: SequenceShape;
  readonly test: SequenceShape;
}

/** Messages of each of {@link unitsOf}. */
export function messagesOfUnits({ test, testFiles }: CorpusShape, reset: Reset): number[] {
  const count = test.messageEnds.length;
  if (reset === 'message' || reset === 'never') return [count];
  if (reset !== 'file') {
    const size = Number(reset.slice('message*'.length));
    return Array.from({ length: Math.ceil(count / size) }, (_, i) =>
      Math.min(size, count - i * size),
    );
  }
  return testFiles
    .map(({ messageEnd }, i) => messageEnd - (i === 0 ? 0 : testFiles[i - 1].messageEnd))
    .filter((messages) => messages > 0);
}

/**
 * The pieces of the test part that are coded as one unit each: one a file under reset `file`, R messages under `message*R`,
 * else one in all.
 */
export function unitsOf(corpus: CorpusData, reset: Reset): SymbolSequence[] {
  if (reset === 'message' || reset === 'never') return [corpus.test];
  if (reset !== 'file') {
    const size = Number(reset.slice('message*'.length));
    const count = corpus.test.messageEnds.length;
    return Array.from({ length: Math.ceil(count / size) }, (_, i) =>
      sliceMessages(corpus.test, i * size, Math.min(count, (i + 1) * size)),
    );
  }
  const units: SymbolSequence[] = [];
  let from = 0;
  for (const file of corpus.testFiles) {
    if (file.messageEnd > from) units.push(sliceMessages(corpus.test, from, file.messageEnd));
    from = file.messageEnd;
  }
  return units;
}
