import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { decideSplit, type SplitRule } from '../../src/corpus/decide-split.ts';
import { foldCuts, foldsOf, trainRanges } from '../../src/corpus/folds.ts';
import { splitCorpus } from '../../src/corpus/split.ts';
import { InputError } from '../../src/errors/errors.ts';
import { messagesOf, numberedCorpus } from './numbered-corpus.ts';

const shapeOf = (corpus: ReturnType<typeof numberedCorpus>) => ({
  ...corpus,
  messageEnds: corpus.sequence.messageEnds,
});

function folded(corpus: ReturnType<typeof numberedCorpus>, by: SplitRule['by'], folds: number) {
  const cuts = foldCuts(shapeOf(corpus), by, folds);
  return { cuts, folds: foldsOf(corpus, cuts) };
}

const files = fc.array(fc.array(fc.nat(9), { maxLength: 8 }), { minLength: 1, maxLength: 5 });
const by = fc.constantFrom('message' as const, 'file' as const, 'block' as const);

describe('folds', () => {
  test('by hand: four messages of two files in two blocks', () => {
    // Symbols 0 1 | 2 3 4 || 5 | 6 7 8: messages of 2 and 3, then 1 and 3.
    const { folds } = folded(
      numberedCorpus([
        [2, 3],
        [1, 3],
      ]),
      'message',
      2,
    );
    expect(folds.map((fold) => messagesOf(fold.test))).toEqual([
      [
        [0, 1],
        [2, 3, 4],
      ],
      [[5], [6, 7, 8]],
    ]);
    expect(folds.map((fold) => messagesOf(fold.train))).toEqual([
      [[5], [6, 7, 8]],
      [
        [0, 1],
        [2, 3, 4],
      ],
    ]);
    expect(folds.map((fold) => [...fold.testFileEnds])).toEqual([
      [2, 2],
      [0, 2],
    ]);
  });

  test('by hand: the middle of three trains on what follows it, then on what came before', () => {
    const { folds } = folded(numberedCorpus([[1, 1, 1, 1, 1, 1]]), 'message', 3);
    expect([...folds[1].test.symbols]).toEqual([2, 3]);
    expect([...folds[1].train.symbols]).toEqual([4, 5, 0, 1]);
  });

  test('by hand: cutting symbols makes two messages of one', () => {
    // Cuts after 3 and 6 of 9 symbols; a message ends at 6 anyway.
    const { folds } = folded(numberedCorpus([[4, 2], [3]]), 'block', 3);
    expect(folds.map((fold) => messagesOf(fold.test))).toEqual([
      [[0, 1, 2]],
      [[3], [4, 5]],
      [[6, 7, 8]],
    ]);
    expect(messagesOf(folds[1].train)).toEqual([
      [6, 7, 8],
      [0, 1, 2],
    ]);
    // The cut inside a train part leaves its message whole.
    expect(messagesOf(folds[2].train)).toEqual([
      [0, 1, 2, 3],
      [4, 5],
    ]);
    expect([...folds[1].testFileEnds]).toEqual([2, 2]);
  });

  test('under fill, cuts by symbols move up to the end of a unit', () => {
    const corpus = { ...numberedCorpus([[4, 4, 4]]), fill: { bytes: 10 } };
    // 12 symbols in two: the cut after 6 lies in the second unit.
    const { folds } = folded(corpus, 'block', 2);
    expect(folds.map((fold) => [...fold.test.messageEnds])).toEqual([[4, 8], [4]]);
  });

  test('every symbol is tested once, and trained on in all other folds', () => {
    let done = 0;
    fc.assert(
      fc.property(files, by, fc.integer({ min: 2, max: 6 }), (f, rule, count) => {
        const corpus = numberedCorpus(f);
        let result: ReturnType<typeof folded>;
        try {
          result = folded(corpus, rule, count);
        } catch (error) {
          expect(error).toBeInstanceOf(InputError);
          return;
        }
        done++;
        const size = corpus.sequence.symbols.length;
        const all = Array.from({ length: size }, (_, i) => i);
        expect(result.folds.flatMap((fold) => [...fold.test.symbols])).toEqual(all);
        for (const [i, { train, test: tested, testFileEnds }] of result.folds.entries()) {
          // No position of the test part is in the train part, and together they are all.
          const held = new Set(tested.symbols);
          expect([...train.symbols].some((symbol) => held.has(symbol))).toBe(false);
          expect([...train.symbols, ...tested.symbols].sort((a, b) => a - b)).toEqual(all);
          // In a circle: from just after the block, once around.
          const first = tested.symbols[tested.symbols.length - 1] + 1;
          expect([...train.symbols]).toEqual(
            Array.from({ length: train.symbols.length }, (_, j) => (first + j) % size),
          );
          expect(train.messageEnds.at(-1)).toBe(train.symbols.length);
          expect(tested.messageEnds.at(-1)).toBe(tested.symbols.length);
          expect(testFileEnds.at(-1)).toBe(tested.messageEnds.length);
          const { starts, ends } = trainRanges(result.cuts, i);
          const ranged = [...starts].flatMap((start, j) => all.slice(start, ends[j]));
          expect(ranged).toEqual([...train.symbols].sort((a, b) => a - b));
        }
        if (rule === 'block') return;
        // Messages stay whole.
        expect(result.folds.flatMap((fold) => messagesOf(fold.test))).toEqual(
          messagesOf(corpus.sequence),
        );
      }),
    );
    expect(done).toBeGreaterThan(20);
  });

  test('the last fold is the plain split in time at the same place', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: 1, max: 5 }), { minLength: 4, maxLength: 40 }),
        fc.integer({ min: 2, max: 4 }),
        fc.constantFrom('message' as const, 'block' as const),
        (lengths, count, rule) => {
          const corpus = numberedCorpus([lengths]);
          const { folds } = folded(corpus, rule, count);
          const things = rule === 'block' ? corpus.sequence.symbols.length : lengths.length;
          const before = Math.floor(((count - 1) * things) / count);
          // A share that nine decimals hold, and that gives just so many things.
          const train = Math.ceil((before / things) * 1e9) / 1e9;
          const split = decideSplit(shapeOf(corpus), { by: rule, order: 'in_time', train });
          const plain = splitCorpus(corpus, split);
          const last = folds[count - 1];
          expect(messagesOf(last.test)).toEqual(messagesOf(plain.test));
          expect(messagesOf(last.train)).toEqual(messagesOf(plain.train));
        },
      ),
    );
  });

  test('share their symbols', () => {
    const { folds } = folded(numberedCorpus([[3, 3, 3, 3]]), 'message', 4);
    const buffers = folds.flatMap((fold) => [fold.train.symbols.buffer, fold.test.symbols.buffer]);
    expect(new Set(buffers).size).toBe(1);
  });

  test.each([
    ['message', [[3, 3]], 3, /block 1 would hold no symbols/, '2 messages'],
    ['file', [[3, 3]], 2, /block 1/, '1 file'],
    ['block', [[1]], 2, /block 1/, '1 symbol'],
    ['message', [[0, 5]], 2, /block 1/, '2 messages'],
  ] as const)('by %s of %j in %i blocks are refused', (rule, lengths, count, message, got) => {
    const corpus = numberedCorpus(lengths.map((file) => [...file]));
    expect(() => folded(corpus, rule, count)).toThrow(message);
    try {
      folded(corpus, rule, count);
    } catch (error) {
      expect((error as InputError).where).toMatchObject({ key: 'split.folds', got });
    }
  });
});
