import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { lastShare } from '../../src/corpus/train-share.ts';
import { InputError } from '../../src/errors/errors.ts';
import { messagesOf, numberedCorpus } from './numbered-corpus.ts';

const corpus = { name: 'telemetry', messagesAs: 'lines' };
const trainOf = (lengths: readonly number[]) => numberedCorpus([lengths]).sequence;

describe('the last share of a train part', () => {
  test('is whole messages, rounded down', () => {
    // 5 messages: 0.5 of them is 2.
    const part = lastShare(trainOf([1, 2, 3, 1, 2]), 0.5, 'message', false, corpus);
    expect(messagesOf(part)).toEqual([[6], [7, 8]]);
  });

  test('by block is symbols, whose first message may lack its beginning', () => {
    const part = lastShare(trainOf([4, 4, 2]), 0.5, 'block', false, corpus);
    expect(messagesOf(part)).toEqual([
      [5, 6, 7],
      [8, 9],
    ]);
  });

  test('by block never cuts a unit', () => {
    const part = lastShare(trainOf([4, 4, 4, 4]), 0.5, 'block', true, corpus);
    expect(messagesOf(part)).toEqual([
      [8, 9, 10, 11],
      [12, 13, 14, 15],
    ]);
  });

  test('is the end of the train part, in its memory, and all of it at 1', () => {
    fc.assert(
      fc.property(
        fc.array(fc.nat(5), { minLength: 1, maxLength: 30 }),
        fc.integer({ min: 1, max: 100 }),
        fc.constantFrom('message' as const, 'file' as const, 'block' as const),
        (lengths, percent, by) => {
          const train = trainOf(lengths);
          const count = by === 'block' ? train.symbols.length : lengths.length;
          // Whole percents, so that plain integers give the number of things.
          const taken = Math.floor((percent * count) / 100);
          const first =
            by === 'block'
              ? train.symbols.length - taken
              : lengths.slice(0, count - taken).reduce((sum, length) => sum + length, 0);
          if (first === train.symbols.length) {
            expect(() => lastShare(train, percent / 100, by, false, corpus)).toThrow(InputError);
            return;
          }
          const part = lastShare(train, percent / 100, by, false, corpus);
          expect(part.symbols.buffer).toBe(train.symbols.buffer);
          expect([...part.symbols]).toEqual([...train.symbols].slice(first));
          expect(part.messageEnds.at(-1)).toBe(part.symbols.length);
          const whole = messagesOf(train).slice(-part.messageEnds.length);
          messagesOf(part).forEach((message, i) => {
            expect(message).toEqual(
              i > 0 || by !== 'block' ? whole[i] : whole[i].slice(-message.length),
            );
          });
          if (percent === 100 && by !== 'block')
            expect(messagesOf(part)).toEqual(messagesOf(train));
        },
      ),
    );
  });

  test('of too little is refused', () => {
    expect(() => lastShare(trainOf([5, 5, 5]), 0.3, 'message', false, corpus)).toThrow(
      /a share of 0\.3 leaves the corpus telemetry nothing to train on/,
    );
    try {
      lastShare(trainOf([5, 5, 5]), 0.3, 'message', false, corpus);
    } catch (error) {
      expect((error as InputError).where).toMatchObject({
        key: 'vary.train_share',
        got: '0.3 of 3 messages, messages: lines',
      });
    }
  });
});
