import { describe, expect, test } from 'vitest';
import { NotYetError } from '../../src/errors/errors.ts';
import { checkFieldsApart, checkWholeRecords, parseRecordField } from '../../src/symbols/record.ts';

describe('parseRecordField', () => {
  test.each([
    ['u8@0', 'u8', 0, 1],
    ['s16be@22', 's16be', 22, 2],
    ['s24le@21', 's24le', 21, 3],
    ['u32be@20', 'u32be', 20, 4],
  ])('%s', (text, type, offsetBytes, widthBytes) => {
    expect(parseRecordField('f', text, 24)).toEqual({ name: 'f', type, offsetBytes, widthBytes });
  });

  test.each([
    ['u16le', /not written as type@offset/],
    ['u16le@-1', /not written as type@offset/],
    ['u16el@0', /no known type/],
    ['u16@0', /no known type/],
    ['f32le@0', /no known type/],
    ['u16le@23', /outside its record/],
    ['u8@24', /outside its record/],
  ])('%s is refused', (text, message) => {
    expect(() => parseRecordField('f', text, 24)).toThrow(message);
  });

  test.each([
    ['u3@8.5', { type: 'u3', offsetBytes: 8, widthBytes: 1, bits: { from: 5, width: 3 } }],
    ['u4@8.6', { type: 'u4', offsetBytes: 8, widthBytes: 2, bits: { from: 6, width: 4 } }],
    ['u1@0', { type: 'u1', offsetBytes: 0, widthBytes: 1, bits: { from: 0, width: 1 } }],
    ['s16@3.0', { type: 's16', offsetBytes: 3, widthBytes: 2, bits: { from: 0, width: 16 } }],
    ['u32@20.0', { type: 'u32', offsetBytes: 20, widthBytes: 4, bits: { from: 0, width: 32 } }],
  ])('%s is a bit field', (text, field) => {
    expect(parseRecordField('f', text, 24)).toEqual({ name: 'f', ...field });
  });

  test.each([
    ['u3@8.8', /not written as type@offset/],
    ['u16le@4.1', /not a bit field/],
    ['u32@4.1', /too many bytes/],
    ['u3@23.6', /outside its record/],
    ['u0@0.0', /not a bit field/],
  ])('%s is refused', (text, message) => {
    expect(() => parseRecordField('f', text, 24)).toThrow(message);
  });

  test('more than 32 bits are not built yet', () => {
    for (const text of ['u64le@0', 'u33@0.0'])
      expect(() => parseRecordField('f', text, 24)).toThrow(NotYetError);
  });
});

describe('checkFieldsApart', () => {
  const fields = (...texts: [string, string][]) =>
    texts.map(([name, text]) => parseRecordField(name, text, 24));

  test('accepts neighbours, in any order, within a byte too', () => {
    expect(() =>
      checkFieldsApart(fields(['b', 'u16le@2'], ['a', 'u16le@0'], ['d', 'u3@4.5'], ['c', 'u5@4'])),
    ).not.toThrow();
  });

  test.each([
    [fields(['a', 'u16le@0'], ['b', 'u8@1']), 'the fields a and b overlap'],
    [fields(['b', 'u32le@0'], ['a', 's16be@2']), 'the fields b and a overlap'],
    [fields(['a', 'u4@8.2'], ['b', 'u3@8.5']), 'the fields a and b overlap'],
    [fields(['a', 'u8@0'], ['a', 'u8@1']), 'the record has two fields named a'],
  ])('names the fields that overlap', (shape, message) => {
    expect(() => checkFieldsApart(shape)).toThrow(message);
  });
});

describe('checkWholeRecords', () => {
  const record = { bytes: 24, fields: [] };

  test('accepts whole records', () => {
    expect(() => checkWholeRecords(48, record, 'telemetry.bin')).not.toThrow();
  });

  test('names size, record and remainder', () => {
    expect(() => checkWholeRecords(49, record, 'telemetry.bin')).toThrow(
      expect.objectContaining({
        message: 'telemetry.bin is not a whole number of records',
        where: expect.objectContaining({
          file: 'telemetry.bin',
          byteOffset: 48,
          expected: 'a multiple of 24 bytes, the size of one record',
          got: '49 bytes: 2 records and 1 byte more',
        }),
      }),
    );
  });
});
