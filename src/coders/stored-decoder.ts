import { BitReader } from '../bits/bit-reader.ts';
import { BugError, CorruptStreamError } from '../errors/errors.ts';
import { newSymbolArray, type SymbolArray } from '../symbols/sequence.ts';
import type { CodedInput, Coder, Decoded, DecodeLimits, Decoder, Setup } from './contract.ts';
import { symbolWidth } from './fixed.ts';
import { MessageWalk, readSymbolCount } from './message-frame.ts';
import { copyBits } from './stored-bits.ts';
import { innerSetup } from './stored-encoder.ts';
import { growSymbols } from './symbol-buffer.ts';

/**
 * Reads what {@link StoredEncoder} wrote. The coder inside is run once over all messages, so that nothing is set up for each; it
 * asks for the start of each message, and what stands between is read then: selector, count, padding, raw messages (which
 * it takes for empty ones). The bits of a coded message are brought to the start of a buffer of its own, because some coders
 * work on whole bytes.
 */
export function storedDecoder(coder: Coder, setup: Setup, limits: DecodeLimits): Decoder {
  const decoder = coder.decoder(innerSetup(setup), limits);
  return { decode: (input) => new StoredMessages(setup, input, limits).decode(decoder) };
}

class StoredMessages {
  readonly #setup: Setup;
  readonly #input: CodedInput;
  readonly #width: number;
  readonly #reader: BitReader;
  readonly #walk: MessageWalk;
  /** The coded bits of the present message. */
  readonly #buffer: Uint8Array;
  /** Symbols of each message that the coder inside is to decode, 0 where the message is raw. */
  readonly #codedCounts: Uint32Array;
  readonly #isRaw: Uint8Array;
  #raw: SymbolArray;
  #rawCount = 0;
  #opened = 0;
  /** Where the bits of the present coded message start, and the bits that were copied; −1 while none is being decoded. */
  #codedFrom = -1;
  #copiedBits = 0;

  constructor(setup: Setup, input: CodedInput, limits: DecodeLimits) {
    this.#setup = setup;
    this.#input = input;
    this.#width = symbolWidth(setup.alphabetSize);
    this.#reader = new BitReader(input.bytes);
    this.#walk = new MessageWalk(this.#reader, setup, input, limits);
    this.#buffer = new Uint8Array(input.bytes.length + 8);
    this.#codedCounts = new Uint32Array(input.messageCount);
    this.#isRaw = new Uint8Array(input.messageCount);
    this.#raw = newSymbolArray(setup.alphabetSize, 0);
  }

  decode(decoder: Decoder): Decoded {
    const { messageCount } = this.#input;
    const { sequence, bitsConsumed } = this.#decodeCoded(decoder);
    if (this.#opened !== messageCount) {
      throw new BugError('a coder did not ask where each of its messages starts', {
        expected: `${messageCount} messages`,
        got: `${this.#opened} messages`,
      });
    }
    this.#closeCoded(bitsConsumed);
    return {
      sequence: {
        alphabetSize: this.#setup.alphabetSize,
        symbols: this.#rawCount === 0 ? sequence.symbols : this.#merged(sequence.symbols),
        messageEnds: this.#walk.messageEnds,
      },
      bitsConsumed: this.#reader.position,
    };
  }

  #decodeCoded(decoder: Decoder): Decoded {
    try {
      return decoder.decode({
        bytes: this.#buffer,
        messageCount: this.#input.messageCount,
        symbolCounts: this.#codedCounts,
        startOf: (_, endBits) => this.#startNext(endBits),
      });
    } catch (error) {
      // The coder inside counts bits from the start of the message, and does not see that it ends.
      if (!(error instanceof CorruptStreamError) || this.#codedFrom < 0) throw error;
      const { bitOffset } = error.where;
      throw new CorruptStreamError(error.message, {
        ...error.where,
        ...(bitOffset === undefined
          ? {}
          : { bitOffset: this.#codedFrom + Math.min(bitOffset, this.#copiedBits) }),
      });
    }
  }

  /** Ends the message before and opens the next; a raw one is read at once. Every coded message starts at bit 0 of the buffer. */
  #startNext(endBits: number): number {
    this.#closeCoded(endBits);
    const reader = this.#reader;
    const walk = this.#walk;
    if (!walk.open()) throw new BugError('a coder asked for more messages than there are');
    const index = this.#opened++;
    const isRaw = reader.readBits(1) === 1;
    const { lengths, align } = this.#setup;
    const count =
      lengths === 'known' ? this.#input.symbolCounts![index] : readSymbolCount(reader, this.#setup);
    walk.book(count);
    const left = reader.limit - reader.position;
    const rawBits = count * this.#width;
    if (isRaw) {
      this.#isRaw[index] = 1;
      if (rawBits > left) {
        throw new CorruptStreamError('a message says it holds more symbols than its bits can', {
          messageIndex: index,
          bitOffset: reader.position,
          got: `${count} symbols of ${this.#width} bits`,
        });
      }
      this.#readRaw(count);
      walk.close(reader.position);
      return 0;
    }
    this.#codedCounts[index] = count;
    this.#codedFrom = reader.position;
    // Longer than raw symbols only by what padding hides.
    this.#copiedBits = Math.min(left, rawBits + align - 1);
    copyBits(reader.bytes, reader.position, reader.position + this.#copiedBits, this.#buffer);
    return 0;
  }

  #closeCoded(endBits: number): void {
    if (this.#codedFrom < 0) return;
    const from = this.#codedFrom;
    this.#codedFrom = -1;
    if (endBits > this.#copiedBits) {
      throw new CorruptStreamError('a message does not end where its bits end', {
        messageIndex: this.#opened - 1,
        bitOffset: from + this.#copiedBits,
        expected: `at most ${this.#copiedBits} coded bits`,
        got: `${endBits} bits`,
      });
    }
    this.#walk.close(from + endBits);
  }

  #readRaw(count: number): void {
    const { alphabetSize } = this.#setup;
    const reader = this.#reader;
    const width = this.#width;
    const symbols = growSymbols(this.#raw, alphabetSize, this.#rawCount, count);
    this.#raw = symbols;
    let at = this.#rawCount;
    for (let i = 0; i < count; i++) {
      const symbol = reader.readBits(width);
      if (symbol >= alphabetSize) {
        throw new CorruptStreamError('a raw symbol is outside the alphabet', {
          bitOffset: reader.position,
          expected: `below ${alphabetSize}`,
          got: String(symbol),
        });
      }
      symbols[at++] = symbol;
    }
    this.#rawCount = at;
  }

  /** Raw and decoded messages in their order. */
  #merged(decoded: SymbolArray): SymbolArray {
    const { messageEnds } = this.#walk;
    const raw = this.#raw;
    const merged = newSymbolArray(this.#setup.alphabetSize, this.#walk.symbolTotal);
    let decodedAt = 0;
    let rawAt = 0;
    let at = 0;
    for (let i = 0; i < messageEnds.length; i++) {
      const end = messageEnds[i];
      if (this.#isRaw[i] === 1) while (at < end) merged[at++] = raw[rawAt++];
      else while (at < end) merged[at++] = decoded[decodedAt++];
    }
    return merged;
  }
}
