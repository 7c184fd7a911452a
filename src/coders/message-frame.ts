import type { BitReader } from '../bits/bit-reader.ts';
import type { BitWriter } from '../bits/bit-writer.ts';
import { countBits, readCount, writeCount } from '../bits/elias-delta.ts';
import { BugError, CorruptStreamError, LimitError } from '../errors/errors.ts';
import type { CodedInput, DecodeLimits, Setup } from './contract.ts';

/** The count that says how many symbols there are: that of units where these have a fixed size, else their own. */
function countOf({ unitSymbols = 1 }: Setup, symbolCount: number): number {
  const count = symbolCount / unitSymbols;
  if (Number.isInteger(count)) return count;
  throw new BugError('a message is not a whole number of units', {
    expected: `a multiple of ${unitSymbols} symbols`,
    got: `${symbolCount} symbols`,
  });
}

/** Bits that {@link writeSymbolCount} will take. */
export function symbolCountBits(setup: Setup, symbolCount: number): number {
  return setup.lengths === 'known' ? 0 : countBits(countOf(setup, symbolCount));
}

/**
 * The first thing in every message: its symbol count, or unit count, where `lengths` does not grant it.
 * @returns bits written, to be booked in `framing`
 */
export function writeSymbolCount(writer: BitWriter, setup: Setup, symbolCount: number): number {
  return setup.lengths === 'known' ? 0 : writeCount(writer, countOf(setup, symbolCount));
}

/** The symbol count that {@link writeSymbolCount} wrote. */
export function readSymbolCount(reader: BitReader, { unitSymbols = 1 }: Setup): number {
  return readCount(reader) * unitSymbols;
}

/**
 * Walks the messages of a coded unit for a decoder: sets the reader's limit under `link`, reads or looks up each symbol
 * count, keeps the limits, and checks at each end that the message was read exactly.
 */
export class MessageWalk {
  readonly messageEnds: Uint32Array;
  readonly #reader: BitReader;
  readonly #setup: Setup;
  readonly #input: CodedInput;
  readonly #limits: DecodeLimits;
  #symbolTotal = 0;
  #index = 0;

  constructor(reader: BitReader, setup: Setup, input: CodedInput, limits: DecodeLimits) {
    const { messageCount } = input;
    if (!Number.isInteger(messageCount) || messageCount < 0) {
      throw new CorruptStreamError('the number of messages is not a count', {
        got: String(messageCount),
      });
    }
    if (messageCount > 2 ** 28) {
      throw new LimitError('too many messages for one unit', {
        expected: 'at most 2^28',
        got: String(messageCount),
      });
    }
    const granted =
      setup.lengths === 'link'
        ? input.messageEndsBits
        : setup.lengths === 'known'
          ? input.symbolCounts
          : undefined;
    if (setup.lengths !== 'sent' && granted?.length !== messageCount) {
      throw new CorruptStreamError(
        'the lengths that the framing grants are missing or not one a message',
        {
          expected: `${messageCount}`,
          got: `${granted?.length ?? 'none'}`,
        },
      );
    }
    this.#reader = reader;
    this.#setup = setup;
    this.#input = input;
    this.#limits = limits;
    this.messageEnds = new Uint32Array(messageCount);
  }

  /** Symbols of the messages so far, the open one included. */
  get symbolTotal(): number {
    return this.#symbolTotal;
  }

  /** Index of the message at hand, or of the next one to open. */
  get index(): number {
    return this.#index;
  }

  /** Goes on at message `index`: those before it were walked by a kernel, which put their ends in place. */
  passTo(index: number, symbolTotal: number): void {
    this.#index = index;
    this.#symbolTotal = symbolTotal;
  }

  /** Opens the next message and returns its symbol count, or −1 when there is none left. */
  next(): number {
    if (!this.open()) return -1;
    const count =
      this.#setup.lengths === 'known'
        ? this.#input.symbolCounts![this.#index]
        : readSymbolCount(this.#reader, this.#setup);
    this.book(count);
    return count;
  }

  /**
   * Opens the next message without reading a count, for coders whose code implies it: they call {@link book} when they
   * know it. False when there is none left.
   */
  open(): boolean {
    if (this.#index === this.messageEnds.length) return false;
    const { startOf } = this.#input;
    if (startOf !== undefined) this.#reader.seek(startOf(this.#index, this.#reader.position));
    if (this.#setup.lengths === 'link')
      this.#reader.setLimit(this.#input.messageEndsBits![this.#index]);
    return true;
  }

  /** Takes note of the open message's symbol count and holds the sum against the limit. */
  book(count: number): void {
    this.#symbolTotal += count;
    if (this.#symbolTotal > this.#limits.maxSymbols) {
      throw new LimitError('the coded bytes hold more symbols than allowed', {
        messageIndex: this.#index,
        bitOffset: this.#reader.position,
        expected: `at most ${this.#limits.maxSymbols}`,
        got: `${this.#symbolTotal} or more`,
      });
    }
    this.messageEnds[this.#index] = this.#symbolTotal;
  }

  /**
   * Ends the message whose own bits end at `position`: skips the padding, which must be zeros, and checks the end
   * against the one that `link` grants.
   */
  close(position: number): void {
    const reader = this.#reader;
    const align = this.#setup.align;
    const end = Math.ceil(position / align) * align;
    const granted =
      this.#setup.lengths === 'link' ? this.#input.messageEndsBits![this.#index] : end;
    if (granted !== end || end > reader.bytes.length * 8) {
      throw new CorruptStreamError('a message does not end where its bits end', {
        messageIndex: this.#index,
        bitOffset: position,
        expected: `end at bit ${granted}`,
        got: `end at bit ${end}`,
        advice: 'The bytes were cut or altered, or belong to another coder or other tables.',
      });
    }
    reader.limit = end;
    reader.seek(position);
    for (let left = end - position; left > 0; left -= 32) {
      if (reader.readBits(Math.min(32, left)) !== 0) {
        throw new CorruptStreamError('the padding of a message is not zeros', {
          messageIndex: this.#index,
          bitOffset: position,
        });
      }
    }
    reader.limit = reader.bytes.length * 8;
    this.#index++;
  }
}
