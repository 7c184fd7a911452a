import { describe, expect, test } from 'vitest';
import { parsePlan } from '../../src/corpus/plan.ts';
import { InputError, NotYetError } from '../../src/errors/errors.ts';

const plan = (more: string, messages = 'every=64') =>
  `plan: 1\ncorpora:\n  a: {files: x, symbols: bytes, messages: "${messages}"}\ncandidates: [huffman]\n${more}\n`;

const parse = (text: string) => parsePlan(text, 'p.yaml');

function refusal(text: string): InputError {
  try {
    parse(text);
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  return expect.unreachable();
}

describe('vary and folds in a plan', () => {
  test('are read', () => {
    const read = parse(
      plan(
        'vary: {train_share: [0.1, 1], message_symbols: [16, 64], align: [1, 32]}\nsplit: {folds: 3}',
      ),
    );
    expect(read.vary).toEqual({
      trainShares: [0.1, 1],
      messageSymbols: [16, 64],
      aligns: [1, 32],
    });
    expect(read.split).toEqual({ by: 'message', order: 'in_time', train: 0.5, folds: 3 });
    // Folds leave no order and no share open.
    expect(read.chosen.filter((choice) => choice.startsWith('split'))).toEqual([
      'split.by: message',
    ]);
    expect(parse(plan('align: 8')).vary).toEqual({});
  });

  test.each([
    ['vary: {train_share: [0]}', /vary\.train_share\[0\].*above 0 and up to 1/],
    ['vary: {train_share: [1.5]}', /vary\.train_share\[0\].*above 0 and up to 1/],
    ['vary: {train_share: []}', /vary\.train_share.*a list of shares/],
    ['vary: {message_symbols: [0]}', /vary\.message_symbols\[0\]/],
    ['vary: {align: [8, 7]}', /vary\.align\[1\].*1, 8, 16, 32 or 64/],
    ['vary: {align: [1, 1]}', /vary\.align\[1\]: listed twice/],
    ['vary: {order: [1, 2]}', /vary\.order: no such key.*train_share, message_symbols, align/],
    [
      'tables: [learned, sent]\nvary: {train_share: [0.5]}',
      /line 6, vary\.train_share.*nothing is trained/,
    ],
    ['tables: [learned]\nsplit: {folds: 2}', /line 6, split\.folds.*nothing is trained/],
    ['split: {folds: 1}', /split\.folds.*2 to 100/],
    ['split: {folds: 2, train: 0.5}', /split\.train: changes nothing beside folds/],
    ['split: {folds: 2, order: random}', /split\.order: folds are contiguous blocks/],
  ])('%s is refused', (more, message) => {
    const error = refusal(plan(more));
    expect(error).not.toBeInstanceOf(NotYetError);
    expect(error.message).toMatch(message);
    expect(error.message).toMatch(/line [56],/);
  });

  test.each(['lines', 'prefix=u8', 'fill=64,unit=8', 'fill=64,unit=line'])(
    'message sizes are refused where messages are %s, with the framings that allow them',
    (messages) => {
      const error = refusal(plan('vary:\n  message_symbols: [16, 64]', messages));
      // Each size on its own.
      expect(error.message.match(/cannot be cut into messages of/g)).toHaveLength(2);
      expect(error.message).toContain('expected messages: whole, every=N or records=K');
      expect(error.message).toMatch(/line 6, vary\.message_symbols\[0\]: the corpus a /);
    },
  );

  test('a message size must be whole records', () => {
    const records = (sizes: string) =>
      `plan: 1\ncorpora:\n  a: {files: x, symbols: bytes, messages: records=2, record: {bytes: 24}}\ncandidates: [huffman]\nvary: {message_symbols: ${sizes}}\n`;
    expect(parse(records('[24, 96]')).vary.messageSymbols).toEqual([24, 96]);
    expect(refusal(records('[24, 100]')).message).toMatch(
      /line 5, vary\.message_symbols\[1\].*expected a multiple of 24.*Use 120/,
    );
  });
});
