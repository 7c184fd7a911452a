import type { BitWriter } from '../bits/bit-writer.ts';
import { BugError } from '../errors/errors.ts';

/**
 * Copies bits `from … to − 1` of `source` to the start of `target`, and zeros behind them: up to the byte's end, and eight bytes
 * more.
 * @param target  at least ⌈(to − from) / 8⌉ + 8 bytes
 */
export function copyBits(source: Uint8Array, from: number, to: number, target: Uint8Array): void {
  const byteCount = Math.ceil((to - from) / 8);
  if (byteCount + 8 > target.length) {
    throw new BugError('there is no room for the bits to copy', {
      expected: `at most ${target.length - 8} bytes`,
      got: `${byteCount} bytes`,
    });
  }
  const shift = from % 8;
  const first = (from - shift) / 8;
  if (shift === 0) {
    target.set(source.subarray(first, first + byteCount));
  } else {
    let high = source[first];
    for (let i = 0; i < byteCount; i++) {
      // Past the last byte there is nothing, which reads as zeros.
      const low = source[first + i + 1];
      target[i] = ((high << shift) | (low >>> (8 - shift))) & 0xff;
      high = low;
    }
  }
  const over = (to - from) % 8;
  if (over !== 0) target[byteCount - 1] &= 0xff << (8 - over);
  target.fill(0, byteCount, byteCount + 8);
}

/** Appends bits `from … to − 1` of `source`. */
export function writeBitsOf(writer: BitWriter, source: Uint8Array, from: number, to: number): void {
  let at = from;
  const over = at % 8;
  if (over !== 0 && at < to) {
    const take = Math.min(8 - over, to - at);
    const byte = source[(at - over) / 8];
    writer.writeBits((byte >>> (8 - over - take)) & ((1 << take) - 1), take);
    at += take;
  }
  const wholeBytes = Math.floor((to - at) / 8);
  if (wholeBytes > 0) {
    writer.writeBytes(source, at / 8, at / 8 + wholeBytes);
    at += wholeBytes * 8;
  }
  if (at < to) writer.writeBits(source[at / 8] >>> (8 - (to - at)), to - at);
}
