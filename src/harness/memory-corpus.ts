import { createHash } from 'node:crypto';
import type { Lengths } from '../coders/contract.ts';
import { InputError } from '../errors/errors.ts';
import type { RecordShape } from '../symbols/record.ts';
import { newSymbolArray, type SymbolSequence } from '../symbols/sequence.ts';
import type { CorpusData } from './corpus-data.ts';

/** Data in memory: the bytes of one message, of several, or symbols with the bounds of their messages. */
export type MessageData = Uint8Array | readonly Uint8Array[] | SymbolSequence;

function isSequence(data: MessageData): data is SymbolSequence {
  return 'messageEnds' in data;
}

/**
 * Messages as one sequence of symbols; bytes become symbols of an alphabet of 256. A sequence is given back as it is, once
 * its bounds and symbols are found to be in order.
 * @throws InputError for bounds that fall or do not cover the symbols, and for symbols outside the alphabet
 */
export function sequenceOf(data: MessageData): SymbolSequence {
  if (isSequence(data)) return checkedSequence(data);
  const messages = data instanceof Uint8Array ? [data] : data;
  const messageEnds = new Uint32Array(messages.length);
  let total = 0;
  messages.forEach((message, i) => {
    if (!(message instanceof Uint8Array))
      throw new InputError('a message is no Uint8Array', { messageIndex: i });
    total += message.length;
    messageEnds[i] = total;
  });
  const symbols = newSymbolArray(256, total);
  messages.forEach((message, i) => {
    symbols.set(message, i === 0 ? 0 : messageEnds[i - 1]);
  });
  return { alphabetSize: 256, symbols, messageEnds };
}

function checkedSequence(sequence: SymbolSequence): SymbolSequence {
  const { symbols, messageEnds, alphabetSize } = sequence;
  let before = 0;
  messageEnds.forEach((end, i) => {
    if (end < before)
      throw new InputError('message ends fall', {
        messageIndex: i,
        expected: `at least ${before}`,
        got: String(end),
      });
    before = end;
  });
  if (before !== symbols.length) {
    throw new InputError('the message ends do not cover the symbols', {
      expected: `a last end of ${symbols.length}`,
      got: String(before),
    });
  }
  for (let i = 0; i < symbols.length; i++) {
    if (symbols[i] < alphabetSize) continue;
    throw new InputError('a symbol lies outside the alphabet', {
      symbolIndex: i,
      expected: `below ${alphabetSize}`,
      got: String(symbols[i]),
    });
  }
  return sequence;
}

/** What else both ends know of data in memory. */
export interface MemoryCorpusOptions {
  /** What `shipped` and `primed` tables are trained on. */
  readonly train?: MessageData;
  /** Absent: `sent` for one message, `link` for several. */
  readonly lengths?: Lengths;
  /** Where the symbols are the bytes of whole records. */
  readonly record?: RecordShape;
  /** How the candidate `fields` codes each named field. */
  readonly fields?: Readonly<Record<string, string>>;
  /** Messages are units, of which as many as fit go into so many coded bytes. */
  readonly fillBytes?: number;
}

function hashOf({ symbols, messageEnds }: SymbolSequence): string {
  const hash = createHash('sha256');
  hash.update(new Uint8Array(symbols.buffer, symbols.byteOffset, symbols.byteLength));
  hash.update(new Uint8Array(messageEnds.buffer, messageEnds.byteOffset, messageEnds.byteLength));
  return hash.digest('hex');
}

/**
 * Data in memory as a corpus that cells can code: without files, plan and symbol taker.
 * @param name  of the corpus, in cell ids and records
 * @throws InputError when train and test have different alphabets, and as {@link sequenceOf}
 */
export function memoryCorpus(
  name: string,
  data: MessageData,
  options: MemoryCorpusOptions = {},
): CorpusData {
  const test = sequenceOf(data);
  const train = options.train === undefined ? undefined : sequenceOf(options.train);
  if (train !== undefined && train.alphabetSize !== test.alphabetSize) {
    throw new InputError('train and test have different alphabets', {
      expected: `${test.alphabetSize} symbols`,
      got: `${train.alphabetSize} symbols`,
    });
  }
  const { record, fields, fillBytes } = options;
  const sha256 = hashOf(test);
  const unitSymbols = train === undefined ? unitSymbolsOf(test) : commonUnitSymbols(test, train);
  return {
    name,
    key: name,
    sha256,
    symbolsAs: test.alphabetSize === 256 ? 'bytes' : `symbols below ${test.alphabetSize}`,
    messagesAs: fillBytes === undefined ? 'as given' : `fill=${fillBytes}`,
    lengths: options.lengths ?? (test.messageEnds.length > 1 ? 'link' : 'sent'),
    alphabetSize: test.alphabetSize,
    ...(record === undefined ? {} : { record }),
    ...(fields === undefined ? {} : { fields }),
    ...(fillBytes === undefined
      ? {}
      : { fill: { bytes: fillBytes, ...(unitSymbols === undefined ? {} : { unitSymbols }) } }),
    sourceBytes: test.symbols.byteLength + (train?.symbols.byteLength ?? 0),
    ...(train === undefined ? {} : { train }),
    test,
    testFiles: [{ path: name, sha256, messageEnd: test.messageEnds.length }],
  };
}

/** Symbols of every message, where they all have as many and at least one. */
function unitSymbolsOf({ messageEnds }: SymbolSequence): number | undefined {
  const first = messageEnds[0] ?? 0;
  if (first === 0) return undefined;
  return messageEnds.every((end, i) => end === first * (i + 1)) ? first : undefined;
}

function commonUnitSymbols(test: SymbolSequence, train: SymbolSequence): number | undefined {
  const size = unitSymbolsOf(test);
  return unitSymbolsOf(train) === size ? size : undefined;
}
