import { CorruptStreamError, PromiseError } from '../errors/errors.ts';

/**
 * Reads bits, most significant first, from `bytes`, up to a limit that moves from message to
 * message.
 *
 * Reading past the limit yields zeros, called phantom bits; they are counted, and more than
 * `phantomBitsAllowed` of them is a {@link CorruptStreamError}, so that a cut stream can never
 * decode without end.
 *
 * Kernels that cannot afford a call per symbol read `bytes` themselves from `position` and give it
 * back with {@link seek}.
 */
export class BitReader {
  readonly bytes: Uint8Array;
  /** Next bit to read. */
  position: number;
  /** First bit that may not be read. */
  limit: number;
  /** Phantom bits that may be read past the limit. */
  phantomBitsAllowed: number;

  constructor(bytes: Uint8Array, phantomBitsAllowed = 0) {
    this.bytes = bytes;
    this.position = 0;
    this.limit = bytes.length * 8;
    this.phantomBitsAllowed = phantomBitsAllowed;
  }

  /** Phantom bits read so far past the present limit. */
  get phantomBits(): number {
    return Math.max(0, this.position - this.limit);
  }

  /**
   * Sets the limit, in bits from the start of `bytes`.
   * @throws CorruptStreamError when it lies before the position or past the bytes
   */
  setLimit(limit: number): void {
    if (limit < this.position || limit > this.bytes.length * 8 || !Number.isInteger(limit)) {
      throw new CorruptStreamError('a message ends outside the coded bytes', {
        bitOffset: this.position,
        got: `end at bit ${limit} of ${this.bytes.length * 8}`,
      });
    }
    this.limit = limit;
  }

  /** Moves to `position` (forwards or back), counting what lies past the limit as phantom. */
  seek(position: number): void {
    if (position < 0 || !Number.isInteger(position)) {
      throw new PromiseError(`cannot move a bit reader to bit ${position}`);
    }
    if (position > this.limit + this.phantomBitsAllowed) this.#refuse(position);
    this.position = position;
  }

  /**
   * Brings more bytes into a reader whose bytes are a window; there are none here.
   * @param fromByte  byte of the window that is needed next
   * @returns bytes by which everything in the window moved down
   */
  refill(_fromByte: number): number {
    return 0;
  }

  /**
   * The next `width` bits as an unsigned integer; bits past the limit are zeros.
   * @param width  0 … 32
   */
  readBits(width: number): number {
    if (!(width >= 0 && width <= 32)) throw new PromiseError(`cannot read ${width} bits at once`);
    const value = this.peekBits(width);
    const next = this.position + width;
    if (next > this.limit + this.phantomBitsAllowed) this.#refuse(next);
    this.position = next;
    return value;
  }

  /** As {@link readBits}, without moving and without an error past the limit. */
  peekBits(width: number): number {
    const bytes = this.bytes;
    const limit = this.limit;
    let at = this.position;
    if (width <= 25 && at + 32 <= limit && width > 0) {
      // Four bytes hold any 25 bits, and all of them lie before the limit's byte ends.
      const offset = at % 8;
      const byte = (at - offset) / 8;
      const window =
        (bytes[byte] << 24) | (bytes[byte + 1] << 16) | (bytes[byte + 2] << 8) | bytes[byte + 3];
      return (window << offset) >>> (32 - width);
    }
    let value = 0;
    let left = width;
    while (left > 0) {
      const offset = at % 8;
      const take = Math.min(left, 8 - offset);
      let piece = 0;
      if (at < limit) {
        piece = (bytes[(at - offset) / 8] >>> (8 - offset - take)) & ((1 << take) - 1);
        // Bits of this byte that lie at or past the limit read as zeros.
        const past = at + take - limit;
        if (past > 0) piece = (piece >>> past) << past;
      }
      value = value * 2 ** take + piece;
      at += take;
      left -= take;
    }
    return value;
  }

  #refuse(position: number): never {
    throw new CorruptStreamError('the coded bytes end too early', {
      bitOffset: this.limit,
      expected: `at least ${position - this.limit - this.phantomBitsAllowed} more bits`,
      got: 'the end of the message',
      advice: 'The bytes were cut or altered, or belong to another coder or other tables.',
    });
  }
}
