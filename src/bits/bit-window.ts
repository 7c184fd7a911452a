import { BitReader } from './bit-reader.ts';

/** Fills `into` from byte `at` on; returns bytes read, fewer than asked for only at the end. */
export type ReadBytes = (into: Uint8Array, at: number) => number;

/** Bytes before the one in use that stay in the buffer: a range decoder looks back at its last seven. */
const KEPT_BYTES = 16;

/**
 * A bit reader whose `bytes` are a window that slides over a source too large for memory. Positions and limit of the
 * reader count from the window's first bit, which is bit `baseBits` of the source; every slide changes all of them.
 *
 * Before anything that reads at most so many bytes, call {@link ensure}; a reader that cannot tell calls
 * {@link BitReader.refill} where the bytes at hand run out.
 */
export class BitWindow extends BitReader {
  readonly #read: ReadBytes;
  readonly #byteLength: number;
  #baseBytes = 0;
  #filledBytes = 0;
  /** In bits of the source. */
  #sourceLimit: number;

  /**
   * @param byteLength   of the source
   * @param windowBytes  size of the window, at least 64
   */
  constructor(read: ReadBytes, byteLength: number, windowBytes: number) {
    super(new Uint8Array(Math.max(64, windowBytes)));
    this.#read = read;
    this.#byteLength = byteLength;
    this.#sourceLimit = byteLength * 8;
    this.#fill();
  }

  /** Where the reader stands in the source, in bits. */
  get sourcePosition(): number {
    return this.#baseBytes * 8 + this.position;
  }

  /** Bits of the source up to the limit that are still to be read. */
  get bitsLeft(): number {
    return this.#sourceLimit - this.sourcePosition;
  }

  /** Bit of the source behind a position of the reader. */
  sourceBit(position: number): number {
    return this.#baseBytes * 8 + position;
  }

  /** Sets the limit, in bits of the source; it is not checked. */
  setSourceLimit(limit: number): void {
    this.#sourceLimit = limit;
    this.#applyLimit();
  }

  /** Makes the next `count` bytes, as far as the limit of the source allows them, readable at once. */
  ensure(count: number): void {
    const at = Math.floor(this.position / 8);
    if (at + count > this.#filledBytes) this.#slide(at);
  }

  override refill(fromByte: number): number {
    const atHand = (this.#baseBytes + this.#filledBytes) * 8;
    return this.#sourceLimit <= atHand ? 0 : this.#slide(fromByte);
  }

  /** Drops what lies well before `at` and reads on; returns the bytes dropped. */
  #slide(at: number): number {
    if (this.#baseBytes + this.#filledBytes >= this.#byteLength) return 0;
    const dropped = Math.max(0, Math.min(at, this.#filledBytes) - KEPT_BYTES);
    if (dropped > 0) {
      this.bytes.copyWithin(0, dropped, this.#filledBytes);
      this.#baseBytes += dropped;
      this.#filledBytes -= dropped;
      this.position -= dropped * 8;
    }
    this.#fill();
    return dropped;
  }

  #fill(): void {
    while (this.#filledBytes < this.bytes.length) {
      const got = this.#read(
        this.bytes.subarray(this.#filledBytes),
        this.#baseBytes + this.#filledBytes,
      );
      if (got === 0) break;
      this.#filledBytes += got;
    }
    this.#applyLimit();
  }

  #applyLimit(): void {
    this.limit = Math.min(this.#filledBytes * 8, this.#sourceLimit - this.#baseBytes * 8);
  }
}
