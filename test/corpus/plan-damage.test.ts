import { describe, expect, test } from 'vitest';
import { parsePlan } from '../../src/corpus/plan.ts';
import { InputError } from '../../src/errors/errors.ts';

const PLAN = `plan: 1
corpora:
  a: {files: a.bin, symbols: bytes, messages: lines}
candidates: [fixed]
`;

const damageOf = (text: string) => parsePlan(`${PLAN}damage: ${text}\n`, 'p.yaml').damage;

function refusal(text: string): InputError {
  try {
    damageOf(text);
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  throw new Error('the plan was accepted');
}

describe('damage of a plan', () => {
  test.each([
    ['{flip: 0.0001, seed: 7}', { flip: 0.0001, seed: 7 }],
    ['{lose_bytes: 0.00001}', { lose_bytes: 0.00001 }],
    ['{lose_messages: 0.01}', { lose_messages: 0.01 }],
    [
      '{lose_messages: {good_to_bad: 0.01, bad_to_good: 0.3}}',
      { lose_messages: { good_to_bad: 0.01, bad_to_good: 0.3 } },
    ],
    [
      '{flip: 0.1, lose_bytes: 0.2, lose_messages: {good_to_bad: 1, bad_to_good: 1, lost_in_bad: 0.5, lost_in_good: 0.1}}',
      {
        flip: 0.1,
        lose_bytes: 0.2,
        lose_messages: { good_to_bad: 1, bad_to_good: 1, lost_in_bad: 0.5, lost_in_good: 0.1 },
      },
    ],
  ])('%s', (text, read) => {
    expect(damageOf(text)).toEqual({ seed: 1, ...read });
  });

  test('says which seed was taken where none is given', () => {
    const chosen = (text: string) => parsePlan(`${PLAN}damage: ${text}\n`, 'p.yaml').chosen;
    expect(chosen('{flip: 0.1}')).toContain('damage.seed: 1');
    expect(chosen('{flip: 0.1, seed: 3}')).not.toContain('damage.seed: 1');
  });

  test.each([
    ['{flip: 0}', 'damage.flip', 'a probability above 0 and below 1'],
    ['{flip: 1}', 'damage.flip', 'a probability above 0 and below 1'],
    ['{lose_bytes: many}', 'damage.lose_bytes', 'a probability above 0 and below 1'],
    ['{lose_messages: 1.5}', 'damage.lose_messages', 'a probability above 0 and below 1'],
    ['{lose_messages: {good_to_bad: 0.1}}', 'damage.lose_messages', 'good_to_bad and bad_to_good'],
    // Stays as it began, and nobody knows how.
    [
      '{lose_messages: {good_to_bad: 0, bad_to_good: 0, lost_in_good: 0.5}}',
      'damage.lose_messages',
      'some messages are lost and some arrive',
    ],
    // Nothing is ever lost.
    [
      '{lose_messages: {good_to_bad: 0, bad_to_good: 0.5}}',
      'damage.lose_messages',
      'some messages are lost and some arrive',
    ],
    // Nothing ever arrives.
    [
      '{lose_messages: {good_to_bad: 0.5, bad_to_good: 0}}',
      'damage.lose_messages',
      'some messages are lost and some arrive',
    ],
    ['{seed: 3}', 'damage', 'at least one of flip, lose_bytes and lose_messages'],
    ['{flip: 0.1, seed: -1}', 'damage.seed', 'a whole number'],
  ])('refuses %s with its line', (text, key, expected) => {
    const error = refusal(text);
    expect(error.where).toMatchObject({ file: 'p.yaml', line: 5, key });
    expect(`${error.message} ${error.where.expected ?? ''}`).toContain(expected);
  });

  test('names the nearest key', () => {
    const error = refusal('{flipp: 0.1}');
    expect(`${error.message} ${error.where.advice ?? ''}`).toContain('Did you mean flip?');
  });
});
