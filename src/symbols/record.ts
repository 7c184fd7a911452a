import { InputError, NotYetError } from '../errors/errors.ts';
import { nearestWord } from '../errors/nearest.ts';

/** Field types that a symbol can be taken from, and their width in bytes. */
const WIDTHS = { u8: 1, s8: 1, u16le: 2, u16be: 2, s16le: 2, s16be: 2 } as const;

/** Wider types: they name the bytes, and `fields` codes them; no symbol is taken from one yet. */
const WIDER = /^[us](24|32)(le|be)$/;

/** A type without a byte order, of up to 32 bits: a bit field. */
const BITS = /^[us]([1-9]|[12]\d|3[0-2])$/;

/** Longer than anything here holds. */
const TOO_WIDE = /^[us](3[3-9]|[4-5]\d|6[0-4])(le|be)?$/;

/** A bit field may reach into so many bytes. */
const MOST_BYTES = 4;

export type FieldType = keyof typeof WIDTHS;

/** One named field of a fixed record. */
export interface RecordField {
  readonly name: string;
  /** A {@link FieldType}, a wider type, or that of a bit field such as `u3`. */
  readonly type: string;
  /** Where the field begins, in bytes from the start of the record. */
  readonly offsetBytes: number;
  /** Bytes that the field lies in, wholly or in part. */
  readonly widthBytes: number;
  /**
   * Of a bit field: its first bit in the first byte (0 is the least significant) and its width. It
   * goes on in the least significant bits of the next byte.
   */
  readonly bits?: { readonly from: number; readonly width: number };
}

/**
 * A fixed-size group of source bytes with named fields, in the order in which they were declared.
 */
export interface RecordShape {
  readonly bytes: number;
  readonly fields: readonly RecordField[];
}

/** Whether symbols can be taken from a field of this type. */
function isFieldType(type: string): type is FieldType {
  return Object.hasOwn(WIDTHS, type);
}

/**
 * Reads `type@offset`, for instance `s16le@4`, or `type@offset.bit` for a bit field: `u3@8.5` is
 * bits 5 to 7 of byte 8.
 * @param recordBytes  size of the record, in bytes; the field must lie inside
 * @throws InputError for another form, an unknown type or a field past the record; NotYetError for
 *   more than 32 bits
 */
export function parseRecordField(name: string, text: string, recordBytes: number): RecordField {
  const parts = /^\s*([a-z0-9]+)\s*@\s*(\d{1,9})(?:\.([0-7]))?\s*$/.exec(text);
  if (parts === null) {
    throw new InputError(`the field ${name} is not written as type@offset`, {
      expected:
        'a type and the byte where the field begins, as in u16le@4, or its byte and bit, as in u3@8.5',
      got: JSON.stringify(text),
    });
  }
  const [, type, offset, bit] = parts;
  const offsetBytes = Number(offset);
  if (TOO_WIDE.test(type)) {
    throw new NotYetError(`the field ${name} has the type ${type}, which is not yet built`, {
      expected: 'at most 32 bits',
      got: type,
    });
  }
  let widthBytes: number;
  let bits: { from: number; width: number } | undefined;
  if (bit === undefined && isFieldType(type)) widthBytes = WIDTHS[type];
  else if (bit === undefined && WIDER.test(type)) widthBytes = Number(type.slice(1, 3)) / 8;
  else if (BITS.test(type) && (bit !== undefined || Number(type.slice(1)) < 8)) {
    bits = { from: Number(bit ?? 0), width: Number(type.slice(1)) };
    widthBytes = Math.ceil((bits.from + bits.width) / 8);
  } else {
    refuseType(name, type, bit);
  }
  if (widthBytes > MOST_BYTES) {
    throw new InputError(`the field ${name} lies in too many bytes`, {
      expected: `bits of at most ${MOST_BYTES} bytes`,
      got: `${widthBytes} bytes`,
    });
  }
  if (offsetBytes + widthBytes > recordBytes) {
    throw new InputError(`the field ${name} lies outside its record`, {
      expected: `an end at byte ${recordBytes} or before`,
      got: `bytes ${offsetBytes} to ${offsetBytes + widthBytes - 1}`,
    });
  }
  return { name, type, offsetBytes, widthBytes, ...(bits === undefined ? {} : { bits }) };
}

function refuseType(name: string, type: string, bit: string | undefined): never {
  if (bit !== undefined) {
    throw new InputError(`the field ${name} is not a bit field`, {
      expected: 'u1 to u32 or s1 to s32, without a byte order, before a bit',
      got: type,
    });
  }
  const near = nearestWord(type, Object.keys(WIDTHS));
  throw new InputError(`the field ${name} has no known type`, {
    expected: `${Object.keys(WIDTHS).join(', ')}, the same with 24 and 32, or bits as in u3@8.5`,
    got: type,
    ...(near === undefined ? {} : { advice: `Did you mean ${near}?` }),
  });
}

/**
 * The bits of the record that a field takes: bit b of byte B is 8 B + b. A field takes one run of
 * them.
 */
export function bitRangeOf(field: RecordField): { from: number; to: number } {
  const from = 8 * field.offsetBytes + (field.bits?.from ?? 0);
  return { from, to: from + (field.bits?.width ?? 8 * field.widthBytes) };
}

/**
 * Checks that no two fields share a bit and that no name stands twice.
 * @throws InputError that names both fields
 */
export function checkFieldsApart(fields: readonly RecordField[]): void {
  const sorted = [...fields].sort((a, b) => bitRangeOf(a).from - bitRangeOf(b).from);
  for (let i = 1; i < sorted.length; i++) {
    const [before, field] = [sorted[i - 1], sorted[i]];
    const { to } = bitRangeOf(before);
    const { from } = bitRangeOf(field);
    if (from >= to) continue;
    throw new InputError(`the fields ${before.name} and ${field.name} overlap`, {
      expected: `${field.name} to begin at byte ${Math.floor(to / 8)}${to % 8 === 0 ? '' : `, bit ${to % 8}`} or after`,
      got: `byte ${field.offsetBytes}${field.bits === undefined ? '' : `, bit ${field.bits.from}`}`,
    });
  }
  const names = fields.map((field) => field.name);
  const twice = names.find((name, i) => names.indexOf(name) !== i);
  if (twice !== undefined) throw new InputError(`the record has two fields named ${twice}`);
}

/**
 * The field of that name.
 * @throws InputError that lists the fields there are, with the nearest
 */
function fieldOf(record: RecordShape, name: string): RecordField {
  const field = record.fields.find((f) => f.name === name);
  if (field !== undefined) return field;
  const names = record.fields.map((f) => f.name);
  const near = nearestWord(name, names);
  throw new InputError(`the record has no field named ${JSON.stringify(name)}`, {
    expected: names.length === 0 ? 'a field declared under record' : `one of ${names.join(', ')}`,
    got: name,
    ...(near === undefined ? {} : { advice: `Did you mean ${near}?` }),
  });
}

/**
 * The field of that name, with a type that symbols can be taken from.
 * @throws InputError as {@link fieldOf}, NotYetError for a wider type or a bit field
 */
export function symbolFieldOf(
  record: RecordShape,
  name: string,
): RecordField & { readonly type: FieldType } {
  const field = fieldOf(record, name);
  const { type } = field;
  if (isFieldType(type) && field.bits === undefined) return { ...field, type };
  throw new NotYetError(`symbols of the type ${type} are not yet built`, {
    expected: `a field of the type ${Object.keys(WIDTHS).join(', ')}`,
    got: `${name}: ${type}`,
  });
}

/**
 * Checks that `byteCount` bytes are whole records.
 * @throws InputError that names the size, the record and what is left over
 */
export function checkWholeRecords(byteCount: number, record: RecordShape, file: string): void {
  const over = byteCount % record.bytes;
  if (over === 0) return;
  throw new InputError(`${file} is not a whole number of records`, {
    file,
    byteOffset: byteCount - over,
    expected: `a multiple of ${record.bytes} bytes, the size of one record`,
    got: `${byteCount} bytes: ${(byteCount - over) / record.bytes} records and ${over} ${over === 1 ? 'byte' : 'bytes'} more`,
    advice: 'Check record.bytes, or cut the header or the broken last record off the file.',
  });
}
