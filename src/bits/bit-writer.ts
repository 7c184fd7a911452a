import { BugError, PromiseError } from '../errors/errors.ts';

/** Bytes that make a call of the sink worth while. */
const DRAIN_BYTES = 2 ** 16;

/**
 * Writes bits, most significant first, into a growing byte buffer.
 *
 * `finish()` is the only way to get the bytes, and it can be called once. Positions are plain
 * numbers, exact to 2^53 bits.
 *
 * Kernels that cannot afford a call per symbol take the state into locals between {@link reserve}
 * and {@link adopt}: `bytes`, `byteLength`, and `pending`, the low `pendingBits` (0 … 7) bits not
 * yet stored.
 *
 * With a sink, whole bytes leave the buffer at {@link drain}; positions count on over them.
 */
export class BitWriter {
  bytes: Uint8Array;
  /** Whole bytes stored so far, those drained left out. */
  byteLength = 0;
  /** Bits written but not yet stored, right-justified; below 2^pendingBits. */
  pending = 0;
  /** 0 … 7 */
  pendingBits = 0;
  #finished = false;
  readonly #sink: ((bytes: Uint8Array) => void) | undefined;
  #drainedBytes = 0;

  /**
   * @param capacityBytes  first size of the buffer, in bytes; it doubles when full.
   * @param sink  takes what is drained; the array it is given changes afterwards
   */
  constructor(capacityBytes = 1024, sink?: (bytes: Uint8Array) => void) {
    this.bytes = new Uint8Array(Math.max(16, capacityBytes));
    this.#sink = sink;
  }

  /** Bits written so far. */
  get position(): number {
    return (this.#drainedBytes + this.byteLength) * 8 + this.pendingBits;
  }

  /** Whether bytes wait that are worth handing to a sink. */
  get shouldDrain(): boolean {
    return this.#sink !== undefined && this.byteLength >= DRAIN_BYTES;
  }

  /** Hands all whole bytes to the sink; nothing without one. No kernel may hold the state meanwhile. */
  drain(): void {
    if (this.#sink === undefined || this.byteLength === 0) return;
    this.#sink(this.bytes.subarray(0, this.byteLength));
    this.#drainedBytes += this.byteLength;
    this.byteLength = 0;
  }

  /** Makes room for `count` more bytes, so that a kernel may store that many without checking. */
  reserve(count: number): void {
    if (this.#finished) throw new BugError('a finished bit writer was written to');
    const needed = this.byteLength + count + 8;
    if (needed <= this.bytes.length) return;
    const grown = new Uint8Array(Math.max(needed, this.bytes.length * 2));
    grown.set(this.bytes.subarray(0, this.byteLength));
    this.bytes = grown;
  }

  /** Gives back the state that a kernel took into locals. */
  adopt(byteLength: number, pending: number, pendingBits: number): void {
    if (
      byteLength > this.bytes.length ||
      pendingBits < 0 ||
      pendingBits > 7 ||
      pending >>> pendingBits !== 0
    ) {
      throw new BugError('a kernel gave back an impossible bit-writer state');
    }
    this.byteLength = byteLength;
    this.pending = pending;
    this.pendingBits = pendingBits;
  }

  /**
   * Writes the low `width` bits of `value`.
   * @param value  an integer in 0 … 2^width − 1
   * @param width  0 … 32 bits
   * @throws PromiseError when value or width is out of range
   */
  writeBits(value: number, width: number): void {
    if (
      value >>> 0 !== value ||
      width >>> 0 !== width ||
      width > 32 ||
      (width < 32 && value >>> width !== 0)
    ) {
      throw new PromiseError(`cannot write the value ${value} in ${width} bits`, {
        expected: 'an integer below 2^width, width 0 to 32',
      });
    }
    this.reserve(5);
    // 7 pending bits and 24 more fit an accumulator of 31 bits, so shifts stay below 32.
    if (width <= 24) {
      this.#append(value, width);
    } else {
      this.#append(value >>> 16, width - 16);
      this.#append(value & 0xffff, 16);
    }
  }

  #append(value: number, width: number): void {
    const accumulator = (this.pending << width) | value;
    let bits = this.pendingBits + width;
    while (bits >= 8) {
      bits -= 8;
      this.bytes[this.byteLength++] = accumulator >>> bits;
    }
    this.pending = accumulator & ((1 << bits) - 1);
    this.pendingBits = bits;
  }

  /** Writes `count` times the same bit. */
  writeRun(bit: 0 | 1, count: number): void {
    let left = count;
    while (left > 0) {
      const take = Math.min(left, 32);
      this.writeBits(bit === 0 ? 0 : 2 ** take - 1, take);
      left -= take;
    }
  }

  /** Appends `source[from … to − 1]`, shifted when the position is not on a byte. */
  writeBytes(source: Uint8Array, from = 0, to = source.length): void {
    this.reserve(to - from + 1);
    const shift = this.pendingBits;
    if (shift === 0) {
      this.bytes.set(source.subarray(from, to), this.byteLength);
      this.byteLength += to - from;
      return;
    }
    let carry = this.pending;
    const bytes = this.bytes;
    let at = this.byteLength;
    const keep = (1 << shift) - 1;
    for (let i = from; i < to; i++) {
      const byte = source[i];
      bytes[at++] = ((carry << (8 - shift)) | (byte >>> shift)) & 0xff;
      carry = byte & keep;
    }
    this.byteLength = at;
    this.pending = carry;
  }

  /**
   * Writes zeros until the position is a multiple of `align`.
   * @param align  1, 2, 4 or a multiple of 8
   * @returns the number of bits written, 0 … align − 1
   */
  padTo(align: number): number {
    const over = align <= 8 ? this.pendingBits % align : this.position % align;
    if (over === 0) return 0;
    this.writeRun(0, align - over);
    return align - over;
  }

  /**
   * The bytes, the last one filled up with zeros; with a sink it has got them all and none are left. The writer cannot be
   * used afterwards.
   */
  finish(): { bytes: Uint8Array; bitLength: number } {
    const bitLength = this.position;
    if (this.pendingBits > 0) this.writeRun(0, 8 - this.pendingBits);
    if (this.#finished) throw new BugError('a bit writer was finished twice');
    this.#finished = true;
    this.drain();
    return { bytes: this.bytes.slice(0, this.byteLength), bitLength };
  }
}
