import { BitWriter } from '../bits/bit-writer.ts';
import { RangeEncoder } from '../stages/range-encoder.ts';
import type { RangeBits } from '../stages/range-precision.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import type { Setup } from './contract.ts';
import type { MessageDraft } from './fill-messages.ts';
import { symbolCountBits, writeSymbolCount } from './message-frame.ts';
import { MessageLedger } from './message-ledger.ts';

/** What a model does with symbols, for a draft that ends as a code string. */
export interface DraftModel {
  /** State and contexts of a message's start. */
  reset(): void;
  encode(symbols: SymbolArray, from: number, to: number, stage: RangeEncoder): void;
}

/** Messages as code strings of an arithmetic coder. The model need not be undone: each message resets it. */
export class CodeStringDraft implements MessageDraft {
  readonly writer = new BitWriter();
  readonly ledger: MessageLedger;
  readonly #setup: Setup;
  readonly #model: DraftModel;
  readonly #stage: RangeEncoder;
  readonly #continuation: 'zeros' | 'any';

  constructor(
    setup: Setup,
    model: DraftModel,
    rangeBits: RangeBits,
    continuation: 'zeros' | 'any',
  ) {
    this.#setup = setup;
    this.#model = model;
    this.ledger = new MessageLedger(setup.align);
    this.#stage = new RangeEncoder(this.writer, rangeBits);
    this.#continuation = continuation;
  }

  start(): void {
    this.#model.reset();
    this.#stage.beginApart();
  }

  take(symbols: SymbolArray, from: number, to: number): void {
    this.#model.encode(symbols, from, to, this.#stage);
  }

  contentBits(): number {
    return this.#stage.bitsIfEnded(this.#continuation);
  }

  mark(): void {
    this.#stage.mark();
  }

  restore(): void {
    this.#stage.restore();
  }

  end(symbolCount: number): void {
    const { ledger, writer } = this;
    const stage = this.#stage;
    ledger.framingBits += writeSymbolCount(writer, this.#setup, symbolCount);
    stage.end(this.#continuation);
    ledger.writtenBits += stage.writtenBits;
    ledger.endingBits += stage.endingBits;
    ledger.payloadBits += stage.payloadBits;
    ledger.close(writer);
  }
}

/** What writes the words of a {@link WordDraft}; both ends know them, or find them from the message's own symbols. */
export interface DraftWords {
  encode(writer: BitWriter, symbols: SymbolArray, from: number, to: number): unknown;
  /** Back to the state of a message's start. */
  restart?(): void;
  /** What is written only where the message ends, and may become shorter by more symbols. */
  readonly tail?: DraftTail;
}

/** Words for the symbols that wait for more of their kind. */
export interface DraftTail {
  /** Whether none ever wait at the end of a unit. */
  readonly isEmptyAtUnits: boolean;
  bits(): number;
  mark(): void;
  restore(): void;
  write(writer: BitWriter): void;
}

/**
 * Messages as words. They go to their place at once, behind room for a count as long
 * as that of the message before; where the count is of another length, they are moved.
 */
export class WordDraft implements MessageDraft {
  readonly writer = new BitWriter();
  readonly ledger: MessageLedger;
  readonly #setup: Setup;
  readonly isSteady: boolean;
  readonly #words: DraftWords;
  readonly #start = new WriterMark();
  readonly #mark = new WriterMark();
  readonly #end = new WriterMark();
  #countBits = 0;
  #contentFrom = 0;
  #moved = new Uint8Array(0);

  constructor(setup: Setup, words: DraftWords) {
    this.#setup = setup;
    this.#words = words;
    this.isSteady = words.tail?.isEmptyAtUnits ?? true;
    this.ledger = new MessageLedger(setup.align);
    this.#start.take(this.writer);
  }

  start(): void {
    const { writer } = this;
    this.#start.restore(writer);
    writer.writeRun(0, this.#countBits);
    this.#contentFrom = writer.position;
    this.#words.restart?.();
    this.mark();
  }

  take(symbols: SymbolArray, from: number, to: number): void {
    this.#words.encode(this.writer, symbols, from, to);
  }

  contentBits(): number {
    return this.writer.position - this.#contentFrom + (this.#words.tail?.bits() ?? 0);
  }

  mark(): void {
    this.#mark.take(this.writer);
    this.#words.tail?.mark();
  }

  restore(): void {
    this.#mark.restore(this.writer);
    this.#words.tail?.restore();
  }

  end(symbolCount: number): void {
    const { ledger, writer } = this;
    const bits = this.contentBits();
    this.#words.tail?.write(writer);
    const countBits = symbolCountBits(this.#setup, symbolCount);
    if (countBits === this.#countBits) this.#putCount(symbolCount);
    else this.#moveContent(symbolCount, bits);
    this.#countBits = countBits;
    ledger.framingBits += countBits;
    ledger.writtenBits += bits;
    ledger.payloadBits += bits;
    ledger.close(writer);
    this.#start.take(writer);
  }

  /** Puts the count into the zeros that were left for it. */
  #putCount(symbolCount: number): void {
    const { writer } = this;
    const end = this.#end;
    end.take(writer);
    // The byte after the count may hold words already: it is or-ed back, whole or pending.
    const lastByte = Math.floor(this.#contentFrom / 8);
    const isWhole = lastByte < end.byteLength;
    const words = isWhole ? writer.bytes[lastByte] : end.pending;
    this.#start.restore(writer);
    writeSymbolCount(writer, this.#setup, symbolCount);
    const head = writer.pending << (8 - writer.pendingBits);
    if (isWhole) writer.bytes[lastByte] = words | head;
    else end.pending = words | (head >>> (8 - end.pendingBits));
    end.restore(writer);
  }

  /** Writes the count and, behind it, the words that stand elsewhere. */
  #moveContent(symbolCount: number, bits: number): void {
    const { writer } = this;
    writer.padTo(8);
    const first = Math.floor(this.#contentFrom / 8);
    const byteCount = writer.byteLength - first;
    if (this.#moved.length < byteCount + 1) this.#moved = new Uint8Array(2 * byteCount + 1);
    const moved = this.#moved;
    moved.set(writer.bytes.subarray(first, writer.byteLength));
    const shift = this.#contentFrom - 8 * first;
    for (let i = 0; i < byteCount; i++)
      moved[i] = (moved[i] << shift) | (moved[i + 1] >>> (8 - shift));
    this.#start.restore(writer);
    writeSymbolCount(writer, this.#setup, symbolCount);
    const wholeBytes = Math.floor(bits / 8);
    const rest = bits - 8 * wholeBytes;
    writer.writeBytes(moved, 0, wholeBytes);
    if (rest > 0) writer.writeBits(moved[wholeBytes] >>> (8 - rest), rest);
  }
}

/** Where a writer stood. */
class WriterMark {
  byteLength = 0;
  pending = 0;
  pendingBits = 0;

  take({ byteLength, pending, pendingBits }: BitWriter): void {
    this.byteLength = byteLength;
    this.pending = pending;
    this.pendingBits = pendingBits;
  }

  restore(writer: BitWriter): void {
    writer.adopt(this.byteLength, this.pending, this.pendingBits);
  }
}
