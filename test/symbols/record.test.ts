import { describe, expect, test } from 'vitest';
import { NotYetError } from '../../src/errors/errors.ts';
import { checkWholeRecords, parseRecordField } from '../../src/symbols/record.ts';

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

  test('bit fields are not built yet', () => {
    expect(() => parseRecordField('f', 'u3@0', 24)).toThrow(NotYetError);
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
