import { createHash } from 'node:crypto';
import { closeSync, fstatSync, openSync, readSync } from 'node:fs';
import { InputError } from '../errors/errors.ts';
import { explainFileError } from '../errors/fs-faults.ts';
import type { RecordShape } from '../symbols/record.ts';
import type { SymbolArray, SymbolChunk } from '../symbols/sequence.ts';
import type { SymbolTaker } from '../symbols/takers/taker.ts';
import type { CorpusFile, CorpusSpec } from './corpus.ts';
import { type FoundFile, findFiles } from './find-files.ts';
import { checkIntake } from './intake.ts';
import type { LengthsGranted } from './messages.ts';
import { usualLengths } from './messages.ts';
import { inputFileBytes } from './read-file.ts';
import { chunkCutter, type StreamedRule } from './stream-cut.ts';

/** Bytes read at once; divisible by the bytes of any symbol that is streamed. */
const CHUNK_BYTES = 2 ** 20;

const MOST_SYMBOLS = 2 ** 32 - 1;

/** A corpus that is read anew, chunk by chunk, whenever its symbols are needed. */
export interface StreamedCorpus {
  readonly name: string;
  readonly files: readonly CorpusFile[];
  /** Of the bytes of all files, one after another in order. */
  readonly sha256: string;
  readonly symbolsAs: string;
  readonly messagesAs: string;
  readonly lengths: LengthsGranted;
  readonly alphabetSize: number;
  readonly sourceBytes: number;
  /** Where the symbols are the bytes of records. */
  readonly record?: RecordShape;
  readonly symbolCount: number;
  /** For each message the index one past its last symbol. */
  readonly messageEnds: Uint32Array;
  /** For each file the index one past its last message. */
  readonly fileEnds: Uint32Array;
  /** How often each symbol occurs; shape [alphabetSize]. */
  readonly symbolCounts: Float64Array;
  /**
   * The symbols of the messages `from` to `to − 1`, as chunks; each is valid until the next is asked for.
   * @throws InputError when a file has changed since it was first read
   */
  chunks(from: number, to: number): Generator<SymbolChunk, void, undefined>;
}

/** How a corpus is streamed. */
export interface StreamOptions {
  /** Even, at least 2; {@link CHUNK_BYTES} when absent. */
  readonly chunkBytes?: number;
  /** Most messages, since the end of each is held. */
  readonly maxMessages?: number;
  /** Called between chunks of the first pass. */
  readonly pause?: () => Promise<void>;
}

interface OpenedFile extends FoundFile {
  readonly byteCount: number;
  readonly changedAt: number;
}

/** What is read of one file at a time. */
interface FileChunk {
  readonly bytes: Uint8Array;
  readonly symbols: SymbolArray;
  /** In symbols of the chunk, one for each message that ends in it. */
  readonly ends: Uint32Array;
}

/**
 * Whether symbols and messages of a corpus can be taken chunk by chunk.
 * @returns why not, as a sentence; undefined where they can
 */
export function whyNotStreamed(spec: CorpusSpec): string | undefined {
  const { taker, rule } = checkIntake(spec);
  if (taker.alphabet !== 'natural' || taker.field !== undefined)
    return `symbols: ${taker.text} are taken from whole files; bytes, bits, nibbles and 16-bit numbers can be read in pieces`;
  if (spec.alphabet !== undefined) return 'alphabet: is checked on whole files; leave it out';
  if (rule.kind === 'fill')
    return 'messages that are filled are tried at several lengths and not read in pieces';
  const pairs = taker.maxSymbolsPerByte < 1;
  const even = rule.kind === 'records' && ((spec.record?.bytes ?? 0) * rule.count) % 2 === 0;
  if (pairs && rule.kind !== 'whole' && rule.kind !== 'every' && !even)
    return `16-bit symbols in messages: ${spec.messages} are not read in pieces`;
  return undefined;
}

/**
 * Reads all files of a corpus once, in pieces, for hashes, counts and the ends of messages.
 * @throws InputError as `loadRawCorpus` does, for what cannot be streamed, and for more messages than allowed
 * Cost: one pass; memory for a chunk, and 4 to 12 bytes a message.
 */
export async function openStreamedCorpus(
  spec: CorpusSpec,
  baseFolder: string,
  options: StreamOptions = {},
): Promise<StreamedCorpus> {
  const refusal = whyNotStreamed(spec);
  if (refusal !== undefined) throw new InputError(refusal, { key: 'memory' });
  const { taker, rule } = checkIntake(spec);
  const found = await findFiles(spec.files, baseFolder);
  if (found.length === 0) throw new InputError(`the corpus ${spec.name} names no files`);
  const opened: OpenedFile[] = [];
  for (const file of found) {
    await inputFileBytes(file.absolutePath, file.path);
    opened.push(stateOf(file));
  }
  const survey = new Survey(spec, taker, rule as StreamedRule, opened, options);
  return survey.read(options.pause ?? (async () => {}));
}

function stateOf(file: FoundFile): OpenedFile {
  const descriptor = openFile(file);
  try {
    const { size, mtimeMs } = fstatSync(descriptor);
    return { ...file, byteCount: size, changedAt: mtimeMs };
  } finally {
    closeSync(descriptor);
  }
}

function openFile({ absolutePath, path }: FoundFile): number {
  try {
    return openSync(absolutePath, 'r');
  } catch (error) {
    throw explainFileError(error, path);
  }
}

function refuseChanged(file: string): never {
  throw new InputError(`${file} changed while it was read`, {
    file,
    advice: 'Code a copy that nothing writes to.',
  });
}

class Survey {
  readonly #spec: CorpusSpec;
  readonly #taker: SymbolTaker;
  readonly #rule: StreamedRule;
  readonly #opened: readonly OpenedFile[];
  readonly #options: StreamOptions;
  #ends = new Uint32Array(1024);
  #endCount = 0;

  constructor(
    spec: CorpusSpec,
    taker: SymbolTaker,
    rule: StreamedRule,
    opened: readonly OpenedFile[],
    options: StreamOptions,
  ) {
    this.#spec = spec;
    this.#taker = taker;
    this.#rule = rule;
    this.#opened = opened;
    this.#options = options;
  }

  async read(pause: () => Promise<void>): Promise<StreamedCorpus> {
    const spec = this.#spec;
    const alphabetSize = this.#alphabetSize();
    const symbolCounts = new Float64Array(alphabetSize);
    const whole = createHash('sha256');
    const files: CorpusFile[] = [];
    const fileEnds: number[] = [];
    let symbolCount = 0;
    let sourceBytes = 0;
    for (const file of this.#opened) {
      const own = createHash('sha256');
      const symbolsBefore = symbolCount;
      const messagesBefore = this.#endCount;
      for (const { bytes, symbols, ends } of this.#fileChunks(file)) {
        whole.update(bytes);
        if (this.#opened.length > 1) own.update(bytes);
        for (let i = 0; i < symbols.length; i++) symbolCounts[symbols[i]]++;
        this.#note(ends, symbolCount);
        symbolCount += symbols.length;
        if (symbolCount > MOST_SYMBOLS)
          this.#refuseMany('symbols', MOST_SYMBOLS, 'Name fewer files.');
        await pause();
      }
      sourceBytes += file.byteCount;
      fileEnds.push(this.#endCount);
      files.push({
        path: file.path,
        sha256: own.digest('hex'),
        byteCount: file.byteCount,
        messageCount: this.#endCount - messagesBefore,
        symbolCount: symbolCount - symbolsBefore,
      });
    }
    if (symbolCount === 0) {
      throw new InputError(`the files of the corpus ${spec.name} hold no symbols`, {
        expected: `at least one symbol, taken as ${this.#taker.text}`,
        got: 'none',
      });
    }
    const sha256 = whole.digest('hex');
    const messageEnds = this.#ends.slice(0, this.#endCount);
    const takesBytes = this.#taker.text === 'bytes';
    return {
      name: spec.name,
      files: files.length === 1 ? [{ ...files[0], sha256 }] : files,
      sha256,
      symbolsAs: this.#taker.text,
      messagesAs: spec.messages,
      lengths: spec.lengths ?? usualLengths(this.#rule),
      alphabetSize,
      sourceBytes,
      ...(takesBytes && spec.record !== undefined ? { record: spec.record } : {}),
      symbolCount,
      messageEnds,
      fileEnds: Uint32Array.from(fileEnds),
      symbolCounts,
      chunks: (from, to) => this.#chunks({ alphabetSize, messageEnds, files }, from, to),
    };
  }

  #alphabetSize(): number {
    const taken = this.#taker.take({
      file: '',
      bytes: new Uint8Array(0),
      segments: { starts: new Uint32Array(0), ends: new Uint32Array(0) },
    });
    return taken.values.kind === 'symbols' ? taken.values.alphabetSize : 0;
  }

  #note(ends: Uint32Array, base: number): void {
    const most = this.#options.maxMessages ?? Number.POSITIVE_INFINITY;
    if (this.#endCount + ends.length > most) {
      this.#refuseMany('messages', most, 'Allow more memory, or name a part of the data.');
    }
    while (this.#endCount + ends.length > this.#ends.length) {
      const grown = new Uint32Array(this.#ends.length * 2);
      grown.set(this.#ends);
      this.#ends = grown;
    }
    for (const end of ends) this.#ends[this.#endCount++] = base + end;
  }

  #refuseMany(what: string, most: number, advice: string): never {
    throw new InputError(
      `the corpus ${this.#spec.name} holds too many ${what} to be read in pieces`,
      {
        key: 'memory',
        expected: `at most ${most} ${what}`,
        advice,
      },
    );
  }

  /** Reads one file; each chunk is valid until the next. */
  *#fileChunks(file: OpenedFile): Generator<FileChunk, void, undefined> {
    const { byteCount, path } = file;
    const descriptor = openFile(file);
    try {
      const buffer = new Uint8Array(Math.min(byteCount, this.#options.chunkBytes ?? CHUNK_BYTES));
      const cutter = chunkCutter(this.#rule, byteCount, path, this.#spec.record);
      const every = this.#rule.kind === 'every' ? this.#rule.count : undefined;
      let symbolsBefore = 0;
      for (let at = 0; at < byteCount; ) {
        const length = Math.min(buffer.length, byteCount - at);
        const bytes = buffer.subarray(0, length);
        readFully(descriptor, bytes, at, path);
        at += length;
        const { segments, isOpen } = cutter.cut(bytes, at === byteCount);
        const taken = this.#taker.take({ file: path, bytes, segments });
        const { symbols } = taken.values as { symbols: SymbolArray };
        const ends =
          every === undefined
            ? taken.messageEnds.subarray(0, taken.messageEnds.length - (isOpen ? 1 : 0))
            : everyEndsWithin(symbolsBefore, symbols.length, every, at === byteCount);
        symbolsBefore += symbols.length;
        yield { bytes, symbols, ends };
      }
      const { size, mtimeMs } = fstatSync(descriptor);
      if (size !== byteCount || mtimeMs !== file.changedAt) refuseChanged(path);
    } finally {
      closeSync(descriptor);
    }
  }

  *#chunks(
    {
      alphabetSize,
      messageEnds,
      files,
    }: Pick<StreamedCorpus, 'alphabetSize' | 'messageEnds' | 'files'>,
    from: number,
    to: number,
  ): Generator<SymbolChunk, void, undefined> {
    const first = from === 0 ? 0 : messageEnds[from - 1];
    const last = to === 0 ? 0 : messageEnds[to - 1];
    let symbolsBefore = 0;
    let message = 0;
    for (const [i, file] of this.#opened.entries()) {
      if (message + files[i].messageCount <= from) {
        message += files[i].messageCount;
        symbolsBefore += files[i].symbolCount;
        continue;
      }
      for (const { symbols, ends } of this.#fileChunks(file)) {
        const messagesBefore = message;
        message += ends.length;
        const base = symbolsBefore;
        symbolsBefore += symbols.length;
        if (messagesBefore >= to) return;
        if (message < from) continue;
        const start = Math.max(0, first - base);
        const end = Math.min(symbols.length, last - base);
        const kept = ends.subarray(
          Math.max(0, from - messagesBefore),
          Math.max(0, Math.min(ends.length, to - messagesBefore)),
        );
        if (start >= end && kept.length === 0) continue;
        const next = messagesBefore + Math.min(ends.length, to - messagesBefore);
        const closed = kept.length === 0 ? start : kept[kept.length - 1];
        const isOpen = closed < end;
        yield {
          alphabetSize,
          symbols: symbols.subarray(start, end),
          messageEnds: kept.map((e) => e - start),
          ...(isOpen
            ? { openSymbolCount: messageEnds[next] - (next === 0 ? 0 : messageEnds[next - 1]) }
            : {}),
        };
      }
    }
  }
}

/** Ends of messages of `count` symbols each, in a chunk that begins after `before` symbols of its file. */
function everyEndsWithin(
  before: number,
  length: number,
  count: number,
  isLast: boolean,
): Uint32Array {
  const firstEnd = (Math.floor(before / count) + 1) * count;
  const whole = Math.max(0, Math.floor((before + length - firstEnd) / count) + 1);
  const hasTail = isLast && (before + length) % count !== 0;
  const ends = new Uint32Array(whole + (hasTail ? 1 : 0));
  for (let i = 0; i < whole; i++) ends[i] = firstEnd + i * count - before;
  if (hasTail) ends[whole] = length;
  return ends;
}

function readFully(descriptor: number, into: Uint8Array, at: number, file: string): void {
  let filled = 0;
  while (filled < into.length) {
    let got: number;
    try {
      got = readSync(descriptor, into, filled, into.length - filled, at + filled);
    } catch (error) {
      throw explainFileError(error, file);
    }
    if (got === 0) refuseChanged(file);
    filled += got;
  }
}
