import { InputError, NotYetError } from '../errors/errors.ts';
import { nearestWord } from '../errors/nearest.ts';

/** Field types that a symbol can be taken from, and their width in bytes. */
const WIDTHS = { u8: 1, s8: 1, u16le: 2, u16be: 2, s16le: 2, s16be: 2 } as const;

/** Types that may be declared but not yet taken: they name the bytes, and that is all. */
const WIDER = /^[us](24|32)(le|be)$/;

export type FieldType = keyof typeof WIDTHS;

/** One named field of a fixed record. */
export interface RecordField {
  readonly name: string;
  /** A {@link FieldType}, or a wider type that no symbol is taken from yet. */
  readonly type: string;
  /** Where the field begins, in bytes from the start of the record. */
  readonly offsetBytes: number;
  readonly widthBytes: number;
}

/** A fixed-size group of source bytes with named fields, in the order in which they were declared. */
export interface RecordShape {
  readonly bytes: number;
  readonly fields: readonly RecordField[];
}

/** Whether symbols can be taken from a field of this type. */
function isFieldType(type: string): type is FieldType {
  return Object.hasOwn(WIDTHS, type);
}

/**
 * Reads `type@offset`, for instance `s16le@4`.
 * @param recordBytes  size of the record, in bytes; the field must lie inside
 * @throws InputError for another form, an unknown type or a field past the record; NotYetError for bit fields
 */
export function parseRecordField(name: string, text: string, recordBytes: number): RecordField {
  const parts = /^\s*([a-z0-9]+)\s*@\s*(\d{1,9})\s*$/.exec(text);
  if (parts === null) {
    throw new InputError(`the field ${name} is not written as type@offset`, {
      expected: 'a type and the byte where the field begins, as in u16le@4',
      got: JSON.stringify(text),
    });
  }
  const [, type, offset] = parts;
  const offsetBytes = Number(offset);
  let widthBytes: number;
  if (isFieldType(type)) widthBytes = WIDTHS[type];
  else if (WIDER.test(type)) widthBytes = Number(type.slice(1, 3)) / 8;
  else if (/^[us]([1-9]|[1-5]\d|6[0-4])(le|be)?$/.test(type) && !/^[us]16$/.test(type)) {
    throw new NotYetError(`the field ${name} has the type ${type}, which is not yet built`, {
      expected: Object.keys(WIDTHS).join(', '),
      got: type,
    });
  } else {
    const near = nearestWord(type, Object.keys(WIDTHS));
    throw new InputError(`the field ${name} has no known type`, {
      expected: Object.keys(WIDTHS).join(', '),
      got: type,
      ...(near === undefined ? {} : { advice: `Did you mean ${near}?` }),
    });
  }
  if (offsetBytes + widthBytes > recordBytes) {
    throw new InputError(`the field ${name} lies outside its record`, {
      expected: `an end at byte ${recordBytes} or before`,
      got: `bytes ${offsetBytes} to ${offsetBytes + widthBytes - 1}`,
    });
  }
  return { name, type, offsetBytes, widthBytes };
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
 * @throws InputError as {@link fieldOf}, NotYetError for a wider type
 */
export function symbolFieldOf(
  record: RecordShape,
  name: string,
): RecordField & { readonly type: FieldType } {
  const field = fieldOf(record, name);
  const { type } = field;
  if (isFieldType(type)) return { ...field, type };
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
