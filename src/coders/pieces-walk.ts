import { BitWindow } from '../bits/bit-window.ts';
import { CorruptStreamError, LimitError } from '../errors/errors.ts';
import type { DecodeLimits, Setup } from './contract.ts';
import type { PiecesInput } from './in-pieces.ts';
import { readSymbolCount } from './message-frame.ts';

/** Bytes of the coded source in memory at once. */
const WINDOW_BYTES = 2 ** 20;
/** A count or a padding is shorter. */
const FRAME_BYTES = 32;

/** As MessageWalk for a decoder that holds all bytes, over a window; positions are bits of the source. */
export class PiecesWalk {
  readonly window: BitWindow;
  readonly #setup: Setup;
  readonly #input: PiecesInput;
  readonly #limits: DecodeLimits;
  readonly #sourceBits: number;
  #symbolTotal = 0;
  #index = 0;

  constructor(setup: Setup, input: PiecesInput, limits: DecodeLimits) {
    const { source, messageCount } = input;
    if (!Number.isInteger(messageCount) || messageCount < 0) {
      throw new CorruptStreamError('the number of messages is not a count', {
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
        { expected: `${messageCount}`, got: `${granted?.length ?? 'none'}` },
      );
    }
    this.#setup = setup;
    this.#input = input;
    this.#limits = limits;
    this.#sourceBits = source.byteLength * 8;
    this.window = new BitWindow(
      (into, at) => source.read(into, at),
      source.byteLength,
      input.windowBytes ?? WINDOW_BYTES,
    );
  }

  /** Opens the next message and returns its symbol count, or −1 when there is none left. */
  next(): number {
    const { messageCount, messageEndsBits, symbolCounts } = this.#input;
    if (this.#index === messageCount) return -1;
    const { lengths } = this.#setup;
    if (lengths === 'link') this.#setLimit(messageEndsBits![this.#index]);
    let count: number;
    if (lengths === 'known') count = symbolCounts![this.#index];
    else {
      this.window.ensure(FRAME_BYTES);
      count = readSymbolCount(this.window, this.#setup);
    }
    this.#symbolTotal += count;
    if (this.#symbolTotal > this.#limits.maxSymbols) {
      throw new LimitError('the coded bytes hold more symbols than allowed', {
        messageIndex: this.#index,
        bitOffset: this.window.sourcePosition,
        expected: `at most ${this.#limits.maxSymbols}`,
        got: `${this.#symbolTotal} or more`,
      });
    }
    return count;
  }

  #setLimit(limit: number): void {
    if (
      limit < this.window.sourcePosition ||
      limit > this.#sourceBits ||
      !Number.isInteger(limit)
    ) {
      throw new CorruptStreamError('a message ends outside the coded bytes', {
        bitOffset: this.window.sourcePosition,
        got: `end at bit ${limit} of ${this.#sourceBits}`,
      });
    }
    this.window.setSourceLimit(limit);
  }

  /** Ends the message whose own bits end at bit `position` of the source: the padding must be zeros, the end as granted. */
  close(position: number): void {
    const { align, lengths } = this.#setup;
    const end = Math.ceil(position / align) * align;
    const granted = lengths === 'link' ? this.#input.messageEndsBits![this.#index] : end;
    if (granted !== end || end > this.#sourceBits) {
      throw new CorruptStreamError('a message does not end where its bits end', {
        messageIndex: this.#index,
        bitOffset: position,
        expected: `end at bit ${granted}`,
        got: `end at bit ${end}`,
        advice: 'The bytes were cut or altered, or belong to another coder or other tables.',
      });
    }
    const { window } = this;
    window.position += position - window.sourcePosition;
    window.setSourceLimit(end);
    window.ensure(FRAME_BYTES);
    for (let left = end - position; left > 0; left -= 32) {
      if (window.readBits(Math.min(32, left)) !== 0) {
        throw new CorruptStreamError('the padding of a message is not zeros', {
          messageIndex: this.#index,
          bitOffset: position,
        });
      }
    }
    window.setSourceLimit(this.#sourceBits);
    this.#index++;
  }
}
