import type { BitReader } from '../bits/bit-reader.ts';
import { BitWriter } from '../bits/bit-writer.ts';
import { readCount, writeCount } from '../bits/elias-delta.ts';
import { CorruptStreamError } from '../errors/errors.ts';
import { compareByCodePoint, isScalarValue, LAST_CODE_POINT } from './utf8.ts';

/**
 * What the ids 0 … m − 1 stand for, where that was found in data. Values rise with the id.
 * - `code-points`: Unicode scalar values.
 * - `range`: the m = `size` neighbouring integers from `low`, as quantised columns have them.
 * - `texts`: distinct texts in the order of their code points.
 */
export type AlphabetMap =
  | { readonly kind: 'code-points'; readonly values: Uint32Array }
  | { readonly kind: 'range'; readonly low: number; readonly size: number }
  | { readonly kind: 'texts'; readonly values: readonly string[] };

/** Largest alphabet of any corpus, in symbols. */
export const MAX_ALPHABET_SIZE = 2 ** 24;

/** Largest distance of a range's end from 0, so that its signed value is still a count. */
export const MAX_RANGE_VALUE = 2 ** 51;

/** The tag that opens a written map, in two bits. */
const TAGS = { 'code-points': 0, range: 1, texts: 2 } as const;

/** Number of symbols, m. */
export function alphabetMapSize(map: AlphabetMap): number {
  return map.kind === 'range' ? map.size : map.values.length;
}

/**
 * Writes a map so that {@link readAlphabetMap} gives it back without knowing anything else: two bits for its kind; then
 * the count and the gaps between code points, or the lowest value (signs interleaved) and the size of a range, or the
 * count and each text as its byte count and its UTF-8 bytes. All counts are Elias delta words.
 * @returns the number of bits written, booked under `tables` where the map is fitted to what is coded
 */
export function writeAlphabetMap(writer: BitWriter, map: AlphabetMap): number {
  const start = writer.position;
  writer.writeBits(TAGS[map.kind], 2);
  if (map.kind === 'range') {
    writeCount(writer, map.low >= 0 ? map.low * 2 : -map.low * 2 - 1);
    writeCount(writer, map.size);
  } else if (map.kind === 'code-points') {
    writeCount(writer, map.values.length);
    let next = 0;
    for (const value of map.values) {
      writeCount(writer, value - next);
      next = value + 1;
    }
  } else {
    const encoder = new TextEncoder();
    writeCount(writer, map.values.length);
    for (const text of map.values) {
      const bytes = encoder.encode(text);
      writeCount(writer, bytes.length);
      writer.writeBytes(bytes);
    }
  }
  return writer.position - start;
}

/** Bits that {@link writeAlphabetMap} takes. */
export function alphabetMapBits(map: AlphabetMap): number {
  return writeAlphabetMap(new BitWriter(), map);
}

/**
 * Reads what {@link writeAlphabetMap} wrote; memory stays in proportion to the bits read.
 * @throws CorruptStreamError for anything that no writer writes: another kind, a value out of range or out of order
 */
export function readAlphabetMap(reader: BitReader): AlphabetMap {
  const start = reader.position;
  const tag = reader.readBits(2);
  if (tag === TAGS.range) return readRange(reader);
  if (tag !== TAGS['code-points'] && tag !== TAGS.texts) refuse(start, 'is of no known kind');
  const count = readCount(reader);
  if (count > MAX_ALPHABET_SIZE) refuse(start, `has ${count} symbols`);
  return tag === TAGS.texts ? readTexts(reader, count) : readCodePoints(reader, count);
}

function readRange(reader: BitReader): AlphabetMap {
  const start = reader.position;
  const signed = readCount(reader);
  const low = signed % 2 === 0 ? signed / 2 : -(signed + 1) / 2;
  const size = readCount(reader);
  if (Math.abs(low) > MAX_RANGE_VALUE || size > MAX_ALPHABET_SIZE) {
    refuse(start, `runs over ${size} values from ${low}`);
  }
  return { kind: 'range', low, size };
}

function readCodePoints(reader: BitReader, count: number): AlphabetMap {
  const values: number[] = [];
  let next = 0;
  for (let i = 0; i < count; i++) {
    const at = reader.position;
    const value = next + readCount(reader);
    if (!isScalarValue(value)) {
      refuse(at, `holds ${value}, no code point up to ${LAST_CODE_POINT}`);
    }
    values.push(value);
    next = value + 1;
  }
  return { kind: 'code-points', values: Uint32Array.from(values) };
}

function readTexts(reader: BitReader, count: number): AlphabetMap {
  const decoder = new TextDecoder('utf-8', { fatal: true, ignoreBOM: true });
  const values: string[] = [];
  for (let i = 0; i < count; i++) {
    const at = reader.position;
    const byteCount = readCount(reader);
    if (byteCount * 8 > reader.limit - reader.position) refuse(at, 'is cut inside a text');
    const bytes = new Uint8Array(byteCount);
    for (let j = 0; j < byteCount; j++) bytes[j] = reader.readBits(8);
    let text: string;
    try {
      text = decoder.decode(bytes);
    } catch {
      refuse(at, 'holds a text that is not UTF-8');
    }
    if (i > 0 && compareByCodePoint(values[i - 1], text) >= 0) {
      refuse(at, 'holds texts that do not rise');
    }
    values.push(text);
  }
  return { kind: 'texts', values };
}

function refuse(bitOffset: number, problem: string): never {
  throw new CorruptStreamError(`the alphabet map ${problem}`, {
    bitOffset,
    expected: 'a map as this program writes it',
    advice: 'The bytes were cut or altered.',
  });
}
