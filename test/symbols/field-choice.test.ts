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
    const contexts = ['', '/last', '/value', '/field:supply', '/field:a/b', '/at:a', '/was:a/b'];
    for (const transform of [...TRANSFORMS, 'linear', 'linear:a', 'linear:a/b:c:@10.1']) {
      for (const context of contexts) {
        for (const first of ['', '/first:supply', '/first:a/b']) {
          const text = transform + context + first;
          expect(fieldChoiceText(parseFieldChoice('f', text))).toBe(text);
        }
      }
    }
  });

  it('has its parts', () => {
    expect(parseFieldChoice('f', 'linear:a:b/was:c/first:d')).toEqual({
      transform: 'linear',
      inputs: ['a', 'b'],
      context: { kind: 'was', name: 'c' },
      first: 'd',
    });
    expect(parseFieldChoice('f', 'delta')).toEqual({
      transform: 'delta',
      context: { kind: 'none' },
    });
  });

  it.each([
    ['detla', 'Did you mean delta?'],
    ['delta/lats', 'Did you mean last?'],
    ['delta/', undefined],
    ['', undefined],
    ['delta/field:', undefined],
    ['auto', undefined],
    ['delta:a', undefined],
    ['linear:', undefined],
    ['linear:a:a', undefined],
    ['linear:a:b:c:d', undefined],
    ['linaer:a', 'Did you mean linear?'],
    ['delta/at:', undefined],
    ['delta/first:', undefined],
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
    [{ supply: 'linear:dt' }, 'the record has no field named "dt"'],
    [{ supply: 'delta/was:dt' }, 'the record has no field named "dt"'],
    [{ supply: 'delta/first:dt' }, 'the record has no field named "dt"'],
    [{ supply: 'delto' }, 'the choice for the field supply cannot be read'],
  ])('refuses %j', (map, message) => {
    expect(() => checkFieldMap(record, map as Record<string, string>)).toThrow(message);
  });
});
