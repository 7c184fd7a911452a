import type { Lengths } from '../coders/contract.ts';
import { type SymbolSequence, sliceMessages } from '../symbols/sequence.ts';

/** One corpus as cells see it: what trains, what is coded, and what both ends know of it. */
export interface CorpusData {
  readonly name: string;
  readonly sha256: string;
  readonly symbolsAs: string;
  readonly messagesAs: string;
  readonly lengths: Lengths;
  readonly alphabetSize: number;
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

/** The pieces of the test part that are coded as one unit each: one a file under reset `file`, else one in all. */
export function unitsOf(corpus: CorpusData, reset: 'message' | 'file' | 'never'): SymbolSequence[] {
  if (reset !== 'file') return [corpus.test];
  const units: SymbolSequence[] = [];
  let from = 0;
  for (const file of corpus.testFiles) {
    if (file.messageEnd > from) units.push(sliceMessages(corpus.test, from, file.messageEnd));
    from = file.messageEnd;
  }
  return units;
}
