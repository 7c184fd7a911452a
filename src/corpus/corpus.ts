import type { AlphabetMap } from '../symbols/alphabet-map.ts';
import type { RecordShape } from '../symbols/record.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { TakenValues } from '../symbols/takers/taker.ts';
import type { FillBudget, LengthsGranted } from './messages.ts';
import type { SampleFacts, SampleRule } from './sample-rule.ts';

/** What a plan, or the options of a command, say about one corpus. */
export interface CorpusSpec {
  readonly name: string;
  /** Paths and patterns, relative to a base folder. */
  readonly files: readonly string[];
  readonly record?: RecordShape;
  /** As `parseSymbolTaker` reads it. */
  readonly symbols: string;
  /** As `parseMessageRule` reads it. */
  readonly messages: string;
  /** Absent: the usual one for this kind of message. */
  readonly lengths?: LengthsGranted;
  /** The alphabet is 0 … alphabet − 1 as it stands; nothing is found in data. */
  readonly alphabet?: number;
  /** Quantisation step of a numeric column. */
  readonly step?: number;
  /** Only these blocks of the files are read. */
  readonly sample?: SampleRule;
  /** How the candidate `fields` codes each named field of the record: see symbols/field-choice.ts. */
  readonly fields?: Readonly<Record<string, string>>;
}

export interface CorpusFile {
  /** From the base folder, with forward slashes. */
  readonly path: string;
  /** Lower-case hexadecimal. */
  readonly sha256: string;
  readonly byteCount: number;
  readonly messageCount: number;
  readonly symbolCount: number;
}

/** What raw and finished corpora have in common. */
export interface CorpusFacts {
  readonly name: string;
  readonly files: readonly CorpusFile[];
  /** Of the bytes of all files, one after another in order. */
  readonly sha256: string;
  readonly symbolsAs: string;
  readonly messagesAs: string;
  readonly lengths: LengthsGranted;
  /** Bytes of all files. */
  readonly sourceBytes: number;
  readonly record?: RecordShape;
  /** Absent: the files were read as a whole. */
  readonly sample?: SampleFacts;
  /** Each candidate fills messages itself: what stands here as messages are the units it fills them with. */
  readonly fill?: FillBudget;
  /** For each file the index one past its last message: equal neighbours are files without a message. */
  readonly fileEnds: Uint32Array;
}

/** All values of a corpus before the alphabet is fixed. */
export interface RawCorpus extends CorpusFacts {
  readonly values: TakenValues;
  /** For each message the index one past its last symbol. */
  readonly messageEnds: Uint32Array;
  /** The alphabet size that the plan gives. */
  readonly givenAlphabet?: number;
}

/**
 * Where the alphabet comes from: the taker itself, the plan, or the data, in which case `map` says what each id stands for
 * and `foundOn` which part of the data was asked.
 */
export type CorpusAlphabet =
  | { readonly kind: 'natural' }
  | { readonly kind: 'given' }
  | { readonly kind: 'map'; readonly map: AlphabetMap; readonly foundOn: 'train' | 'all' };

/** In-house data as symbols and messages. */
export interface Corpus extends CorpusFacts {
  readonly sequence: SymbolSequence;
  readonly alphabet: CorpusAlphabet;
}

/** Where a symbol stands, for messages about it: its file, its message in that file, and its place in that message. */
export function placeOfSymbol(
  raw: Pick<RawCorpus, 'files' | 'fileEnds' | 'messageEnds'>,
  symbolIndex: number,
): { file: string; messageIndex: number; symbolIndex: number } {
  const message = firstAbove(raw.messageEnds, symbolIndex);
  const file = firstAbove(raw.fileEnds, message);
  const start = message === 0 ? 0 : raw.messageEnds[message - 1];
  return {
    file: raw.files[file].path,
    messageIndex: message - (file === 0 ? 0 : raw.fileEnds[file - 1]),
    symbolIndex: symbolIndex - start,
  };
}

/** Index of the first entry above `value` in an array that never falls. */
export function firstAbove(ends: Uint32Array, value: number): number {
  let low = 0;
  let high = ends.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (ends[middle] > value) high = middle;
    else low = middle + 1;
  }
  return low;
}
