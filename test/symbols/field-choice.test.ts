import { describe, expect, it } from 'vitest';
import {
  checkFieldMap,
  fieldChoiceText,
  parseFieldChoice,
  TRANSFORMS,
} from '../../src/symbols/field-choice.ts';
import { parseRecordField } from '../../src/symbols/record.ts';

describe('the choice of a field in words', () => {
  it('is read and written again', () => {
    for (const transform of TRANSFORMS) {
      for (const context of ['', '/last', '/value', '/field:supply', '/field:a/b']) {
        const text = transform + context;
        expect(fieldChoiceText(parseFieldChoice('f', text))).toBe(text);
      }
    }
  });

  it.each([
    ['detla', 'Did you mean delta?'],
    ['delta/lats', 'Did you mean last?'],
    ['delta/', undefined],
    ['', undefined],
    ['delta/field:', undefined],
    ['auto', undefined],
  ])('%j is refused', (text, advice) => {
    expect(() => parseFieldChoice('supply', text)).toThrow(
      expect.objectContaining({
        message: 'the choice for the field supply cannot be read',
        where: expect.objectContaining(advice === undefined ? {} : { advice }),
      }),
    );
  });
});

describe('checkFieldMap', () => {
  const record = { bytes: 4, fields: [parseRecordField('supply', 's16le@0', 4)] };

  it('takes fields that exist, and nameless bytes', () => {
    expect(() => checkFieldMap(record, { supply: 'delta', '@2': 'raw' })).not.toThrow();
  });

  it.each([
    [{ suply: 'delta' }, 'the record has no field named "suply"'],
    [{ supply: 'delta/field:dt' }, 'the record has no field named "dt"'],
    [{ supply: 'delto' }, 'the choice for the field supply cannot be read'],
  ])('refuses %j', (map, message) => {
    expect(() => checkFieldMap(record, map as Record<string, string>)).toThrow(message);
  });
});
