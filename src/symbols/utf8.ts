import { InputError } from '../errors/errors.ts';

/** Largest code point of Unicode. */
export const LAST_CODE_POINT = 0x10ffff;

/** Bytes in `bytes[from … to − 1]` that begin a code point: in valid UTF-8, the number of code points. */
export function countCodePoints(bytes: Uint8Array, from: number, to: number): number {
  let count = 0;
  for (let i = from; i < to; i++) if ((bytes[i] & 0xc0) !== 0x80) count++;
  return count;
}

/** Length of the well-formed sequence at `at`, 0 when there is none (RFC 3629, section 4: no overlong form, no surrogate). */
function sequenceLength(bytes: Uint8Array, at: number, to: number): number {
  const lead = bytes[at];
  if (lead < 0x80) return 1;
  if (lead < 0xc2 || lead > 0xf4) return 0;
  const length = lead < 0xe0 ? 2 : lead < 0xf0 ? 3 : 4;
  if (at + length > to) return 0;
  const second = bytes[at + 1];
  const least = lead === 0xe0 ? 0xa0 : lead === 0xf0 ? 0x90 : 0x80;
  const most = lead === 0xed ? 0x9f : lead === 0xf4 ? 0x8f : 0xbf;
  if (second < least || second > most) return 0;
  for (let i = 2; i < length; i++) if ((bytes[at + i] & 0xc0) !== 0x80) return 0;
  return length;
}

/**
 * Puts the code points of `bytes[from … to − 1]` into `out` from index `at`.
 * @returns the index after the last one written
 * @throws InputError with the byte offset of the first byte that is not UTF-8 (RFC 3629)
 */
export function takeCodePoints(
  bytes: Uint8Array,
  from: number,
  to: number,
  out: Uint32Array,
  at: number,
  file: string,
): number {
  let next = at;
  let i = from;
  while (i < to) {
    const lead = bytes[i];
    if (lead < 0x80) {
      out[next++] = lead;
      i++;
      continue;
    }
    const length = sequenceLength(bytes, i, to);
    if (length === 0) refuseUtf8(bytes, i, to, file);
    let value = lead & (0x7f >>> length);
    for (let j = 1; j < length; j++) value = (value << 6) | (bytes[i + j] & 0x3f);
    out[next++] = value;
    i += length;
  }
  return next;
}

/**
 * Checks `bytes[from … to − 1]` without taking anything.
 * @throws InputError as {@link takeCodePoints}
 */
export function checkUtf8(bytes: Uint8Array, from: number, to: number, file: string): void {
  let i = from;
  while (i < to) {
    const length = sequenceLength(bytes, i, to);
    if (length === 0) refuseUtf8(bytes, i, to, file);
    i += length;
  }
}

function refuseUtf8(bytes: Uint8Array, at: number, to: number, file: string): never {
  const shown = Array.from(bytes.subarray(at, Math.min(to, at + 4)), (b) =>
    b.toString(16).padStart(2, '0'),
  ).join(' ');
  throw new InputError(`${file} is not UTF-8 text`, {
    file,
    byteOffset: at,
    expected: 'a whole UTF-8 sequence inside one message',
    got: `the bytes ${shown}`,
    advice: 'Take symbols as bytes, or convert the file to UTF-8 first.',
  });
}

/** Bytes that UTF-8 needs for a code point. */
export function utf8Length(codePoint: number): number {
  if (codePoint < 0x80) return 1;
  if (codePoint < 0x800) return 2;
  return codePoint < 0x10000 ? 3 : 4;
}

/** Writes a code point (no surrogate) at `at` and returns the index after it. */
export function putUtf8(codePoint: number, out: Uint8Array, at: number): number {
  const length = utf8Length(codePoint);
  if (length === 1) {
    out[at] = codePoint;
    return at + 1;
  }
  let rest = codePoint;
  for (let i = length - 1; i > 0; i--) {
    out[at + i] = 0x80 | (rest & 0x3f);
    rest >>>= 6;
  }
  out[at] = ((0xf00 >>> length) & 0xff) | rest;
  return at + length;
}

/** Whether a number is a Unicode scalar value: 0 … 0x10FFFF without the surrogates. */
export function isScalarValue(value: number): boolean {
  return value >= 0 && value <= LAST_CODE_POINT && (value < 0xd800 || value > 0xdfff);
}

/** Order of two texts by code point, which is the order of their UTF-8 bytes (not that of UTF-16 units). */
export function compareByCodePoint(a: string, b: string): number {
  const shorter = Math.min(a.length, b.length);
  for (let i = 0; i < shorter; i++) {
    const x = a.charCodeAt(i);
    const y = b.charCodeAt(i);
    if (x === y) continue;
    // A surrogate stands for a code point above every other unit.
    const xHigh = x >= 0xd800 && x <= 0xdfff;
    const yHigh = y >= 0xd800 && y <= 0xdfff;
    return xHigh === yHigh ? x - y : xHigh ? 1 : -1;
  }
  return a.length - b.length;
}
