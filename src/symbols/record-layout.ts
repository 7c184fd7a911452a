import { InputError } from '../errors/errors.ts';
import { bitRangeOf, checkFieldsApart, type RecordField, type RecordShape } from './record.ts';

/** Largest record that is taken apart, in bytes. */
const LARGEST_RECORD_BYTES = 4096;

/** Where a part lies in its record. */
export interface PartPlace {
  /** The byte of its least significant bits. */
  readonly lowAt: number;
  /** Whether the others come before that byte, not after it. */
  readonly reversed: boolean;
  /** Bytes that it lies in. */
  readonly count: number;
  /** Its lowest bit in the lowest byte. */
  readonly shift: number;
}

/**
 * A record taken apart into integers and put together again: declared fields, and what lies between
 * them.
 *
 * Every bit of the record belongs to exactly one part. Whole bytes that no field names are parts of
 * their own, called `@` and the byte; bits left over within a byte are too, called `@byte.bit`.
 * Parts stand in the order of their first bit.
 *
 * A value is the part's bits as an unsigned integer below 2^width, two's complement for signed
 * types.
 */
export class RecordLayout {
  readonly bytes: number;
  readonly names: readonly string[];
  /** Bits of each part, 1 … 32. */
  readonly widths: Uint8Array;
  /** 1 for parts whose values are signed. */
  readonly signed: Uint8Array;
  /**
   * For each part the byte of its least significant bits, the step to the next byte, and the number
   * of bytes.
   */
  readonly #lowAt: Int32Array;
  readonly #step: Int8Array;
  readonly #count: Uint8Array;
  readonly #shift: Uint8Array;
  readonly #mask: Int32Array;

  /** @throws InputError for fields that overlap or a record too large */
  constructor(record: RecordShape) {
    if (record.bytes > LARGEST_RECORD_BYTES) {
      throw new InputError('the record is too large to be coded by its fields', {
        key: 'record',
        expected: `at most ${LARGEST_RECORD_BYTES} bytes`,
        got: `${record.bytes} bytes`,
      });
    }
    checkFieldsApart(record.fields);
    const parts = withGaps(record);
    this.bytes = record.bytes;
    this.names = parts.map((part) => part.name);
    this.widths = Uint8Array.from(parts, (part) => bitRangeOf(part).to - bitRangeOf(part).from);
    this.signed = Uint8Array.from(parts, (part) => (part.type.startsWith('s') ? 1 : 0));
    const bigEndian = (part: RecordField) => part.type.endsWith('be');
    this.#lowAt = Int32Array.from(parts, (part) =>
      bigEndian(part) ? part.offsetBytes + part.widthBytes - 1 : part.offsetBytes,
    );
    this.#step = Int8Array.from(parts, (part) => (bigEndian(part) ? -1 : 1));
    this.#count = Uint8Array.from(parts, (part) => part.widthBytes);
    this.#shift = Uint8Array.from(parts, (part) => part.bits?.from ?? 0);
    this.#mask = Int32Array.from(this.widths, (width) => -1 >>> (32 - width));
  }

  get partCount(): number {
    return this.names.length;
  }

  /** Where each part lies, for a program of its own that takes records apart. */
  get places(): readonly PartPlace[] {
    return this.names.map((_, part) => ({
      lowAt: this.#lowAt[part],
      reversed: this.#step[part] < 0 && this.#count[part] > 1,
      count: this.#count[part],
      shift: this.#shift[part],
    }));
  }

  /** The values of the record at `bytes[at …]`, one a part. */
  takeApart(bytes: Uint8Array, at: number, values: Uint32Array): void {
    const count = this.#count;
    const lowAt = this.#lowAt;
    const step = this.#step;
    for (let part = 0; part < count.length; part++) {
      let place = at + lowAt[part];
      let value = bytes[place];
      if (count[part] > 1) {
        const by = step[part];
        place += by;
        value |= bytes[place] << 8;
        if (count[part] > 2) {
          place += by;
          value |= bytes[place] << 16;
          if (count[part] > 3) value |= bytes[place + by] << 24;
        }
      }
      values[part] = (value >>> this.#shift[part]) & this.#mask[part];
    }
  }

  /** Writes the record of these values to `bytes[at …]`; its bytes must be zero before. */
  putTogether(values: Uint32Array, bytes: Uint8Array, at: number): void {
    const count = this.#count;
    const lowAt = this.#lowAt;
    const step = this.#step;
    for (let part = 0; part < count.length; part++) {
      const value = values[part] << this.#shift[part];
      let place = at + lowAt[part];
      bytes[place] |= value;
      if (count[part] === 1) continue;
      const by = step[part];
      place += by;
      bytes[place] |= value >>> 8;
      if (count[part] === 2) continue;
      place += by;
      bytes[place] |= value >>> 16;
      if (count[part] === 4) bytes[place + by] |= value >>> 24;
    }
  }
}

/** The declared fields and what lies between, by place. */
function withGaps(record: RecordShape): RecordField[] {
  const declared = [...record.fields].sort((a, b) => bitRangeOf(a).from - bitRangeOf(b).from);
  const parts: RecordField[] = [];
  let at = 0;
  const fill = (end: number) => {
    while (at < end) {
      const offsetBytes = Math.floor(at / 8);
      const from = at % 8;
      const width = Math.min(8 - from, end - at);
      parts.push(
        width === 8
          ? { name: `@${offsetBytes}`, type: 'u8', offsetBytes, widthBytes: 1 }
          : {
              name: `@${offsetBytes}.${from}`,
              type: `u${width}`,
              offsetBytes,
              widthBytes: 1,
              bits: { from, width },
            },
      );
      at += width;
    }
  };
  for (const field of declared) {
    const { from, to } = bitRangeOf(field);
    fill(from);
    parts.push(field);
    at = to;
  }
  fill(8 * record.bytes);
  return parts;
}
