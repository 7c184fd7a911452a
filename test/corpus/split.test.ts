import fc from 'fast-check';
import seedrandom from 'seedrandom';
import { describe, expect, test } from 'vitest';
import type { Corpus, CorpusFile } from '../../src/corpus/corpus.ts';
import { decideSplit, type SplitRule } from '../../src/corpus/decide-split.ts';
import { repeatedMessages } from '../../src/corpus/repeated-messages.ts';
import { splitCorpus } from '../../src/corpus/split.ts';
import { InputError } from '../../src/errors/errors.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

/** A corpus of numbered symbols: its files, each with the lengths of its messages. */
function corpusOf(files: number[][], symbolAt: (i: number) => number = (i) => i): Corpus {
  const lengths = files.flat();
  let total = 0;
  const messageEnds = Uint32Array.from(lengths, (length) => {
    total += length;
    return total;
  });
  let messages = 0;
  const fileEnds = Uint32Array.from(files, (file) => {
    messages += file.length;
    return messages;
  });
  return {
    name: 'telemetry',
    files: files.map(
      (_, i): CorpusFile => ({
        path: `${i}.bin`,
        sha256: '',
        byteCount: 0,
        messageCount: 0,
        symbolCount: 0,
      }),
    ),
    sha256: '',
    symbolsAs: 'bytes',
    messagesAs: 'whole',
    lengths: 'sent',
    sourceBytes: total,
    fileEnds,
    alphabet: { kind: 'given' },
    sequence: {
      alphabetSize: 65536,
      symbols: Uint16Array.from({ length: total }, (_, i) => symbolAt(i)),
      messageEnds,
    },
  };
}

function split(corpus: Corpus, rule: SplitRule) {
  const shape = { ...corpus, messageEnds: corpus.sequence.messageEnds };
  return splitCorpus(corpus, decideSplit(shape, rule));
}

function messagesOf(sequence: SymbolSequence): number[][] {
  return Array.from(sequence.messageEnds, (end, i) => [
    ...sequence.symbols.subarray(i === 0 ? 0 : sequence.messageEnds[i - 1], end),
  ]);
}

const rule = fc.record({
  by: fc.constantFrom('message' as const, 'file' as const, 'block' as const),
  order: fc.constantFrom('in_time' as const, 'random' as const),
  train: fc.integer({ min: 0, max: 1000 }).map((n) => n / 1000),
  seed: fc.nat(1000),
});
const files = fc.array(fc.array(fc.nat(9), { maxLength: 6 }), { minLength: 1, maxLength: 5 });

/** Splits, or undefined where the rule leaves a side empty. */
function trySplit(corpus: Corpus, r: SplitRule) {
  try {
    return split(corpus, r);
  } catch (error) {
    expect(error).toBeInstanceOf(InputError);
    return undefined;
  }
}

describe('splitCorpus', () => {
  test('train and test are disjoint, and together everything in order', () => {
    let done = 0;
    fc.assert(
      fc.property(files, rule, (f, r) => {
        const corpus = corpusOf(f);
        const parts = trySplit(corpus, r);
        if (parts === undefined) return;
        done++;
        const { train, test: other } = parts;
        // Symbols are numbered, so the union tells everything.
        const all = [...train.symbols, ...other.symbols].sort((a, b) => a - b);
        expect(all).toEqual([...corpus.sequence.symbols]);
        for (const part of [train, other]) {
          expect([...part.symbols]).toEqual([...part.symbols].sort((a, b) => a - b));
          expect(part.symbols.length).toBeGreaterThan(0);
          expect(part.messageEnds.at(-1)).toBe(part.symbols.length);
          expect(part.alphabetSize).toBe(corpus.sequence.alphabetSize);
        }
        // Each piece lies in the message it is said to come from, and every message is somewhere.
        const whole = messagesOf(corpus.sequence);
        const gathered = whole.map((): number[] => []);
        const seen = new Set<number>();
        for (const [part, indexes] of [
          [train, parts.trainMessageIndexes],
          [other, parts.testMessageIndexes],
        ] as const) {
          messagesOf(part).forEach((piece, i) => {
            gathered[indexes[i]].push(...piece);
            // Only an empty message gives an empty piece, and it gives one.
            expect(piece.length === 0).toBe(whole[indexes[i]].length === 0);
            if (piece.length === 0) expect(seen.has(indexes[i])).toBe(false);
            seen.add(indexes[i]);
          });
        }
        expect(gathered.map((m) => m.sort((a, b) => a - b))).toEqual(whole);
        expect(seen.size).toBe(whole.length);
        if (r.by !== 'block') {
          const trainMessages = new Set(parts.trainMessageIndexes);
          expect([...parts.testMessageIndexes].some((m) => trainMessages.has(m))).toBe(false);
        }
      }),
      { numRuns: 400 },
    );
    expect(done).toBeGreaterThan(100);
  });

  test('file ends count the messages of each file on each side', () => {
    fc.assert(
      fc.property(files, rule, (f, r) => {
        const corpus = corpusOf(f);
        const parts = trySplit(corpus, r);
        if (parts === undefined) return;
        const fileOf = (message: number) => corpus.fileEnds.findIndex((end) => message < end);
        for (const [ends, indexes] of [
          [parts.trainFileEnds, parts.trainMessageIndexes],
          [parts.testFileEnds, parts.testMessageIndexes],
        ] as const) {
          const expected = f.map((_, file) => [...indexes].filter((m) => fileOf(m) <= file).length);
          expect([...ends]).toEqual(expected);
        }
      }),
    );
  });

  test('in time, the first ⌊train · count⌋ messages are train, without copying', () => {
    const corpus = corpusOf([
      [2, 1, 3],
      [4, 1],
    ]);
    const parts = split(corpus, { by: 'message', order: 'in_time', train: 0.5 });
    expect(messagesOf(parts.train)).toEqual([[0, 1], [2]]);
    expect(messagesOf(parts.test)).toEqual([[3, 4, 5], [6, 7, 8, 9], [10]]);
    expect([...parts.trainFileEnds]).toEqual([2, 2]);
    expect([...parts.testFileEnds]).toEqual([1, 3]);
    expect(parts.train.symbols.buffer).toBe(corpus.sequence.symbols.buffer);
    expect(parts.test.symbols.buffer).toBe(corpus.sequence.symbols.buffer);
  });

  test('shares are decimal: 0.29 of 100 messages are 29', () => {
    const corpus = corpusOf([Array.from({ length: 100 }, () => 1)]);
    const parts = split(corpus, { by: 'message', order: 'in_time', train: 0.29 });
    expect(parts.train.messageEnds).toHaveLength(29);
  });

  test('by file, all messages of a file stay together', () => {
    const parts = split(corpusOf([[1], [2, 2], [3]]), { by: 'file', order: 'in_time', train: 0.7 });
    expect(messagesOf(parts.train)).toEqual([[0], [1, 2], [3, 4]]);
    expect(messagesOf(parts.test)).toEqual([[5, 6, 7]]);
  });

  test('by block, in time, the message across the cut becomes two', () => {
    const parts = split(corpusOf([[2, 6, 2]]), { by: 'block', order: 'in_time', train: 0.5 });
    expect(messagesOf(parts.train)).toEqual([
      [0, 1],
      [2, 3, 4],
    ]);
    expect(messagesOf(parts.test)).toEqual([
      [5, 6, 7],
      [8, 9],
    ]);
    expect([...parts.trainMessageIndexes]).toEqual([0, 1]);
    expect([...parts.testMessageIndexes]).toEqual([1, 2]);
  });

  test('by block, an empty message at the cut goes with the block that begins there', () => {
    const parts = split(corpusOf([[0, 2, 0, 2, 0]]), { by: 'block', order: 'in_time', train: 0.5 });
    expect([...parts.trainMessageIndexes]).toEqual([0, 1]);
    expect([...parts.testMessageIndexes]).toEqual([2, 3, 4]);
  });

  test('by block, at random, 64 equal blocks are dealt and neighbours of one side stay joined', () => {
    const corpus = corpusOf([[64 * 10]]);
    const parts = split(corpus, { by: 'block', order: 'random', train: 0.25, seed: 3 });
    expect(parts.train.symbols).toHaveLength(16 * 10);
    const blocks = (s: SymbolSequence) => new Set([...s.symbols].map((v) => Math.floor(v / 10)));
    expect(blocks(parts.train).size).toBe(16);
    expect(blocks(parts.test).size).toBe(48);
    // A new message begins only where the other side took the block before.
    for (const part of [parts.train, parts.test])
      for (const message of messagesOf(part).slice(1))
        expect(blocks(part).has(message[0] / 10 - 1)).toBe(false);
  });

  test('at random, the seed decides, and another seed decides otherwise', () => {
    const corpus = corpusOf([Array.from({ length: 60 }, () => 1)]);
    const draw = (seed: number) => [
      ...split(corpus, { by: 'message', order: 'random', train: 0.5, seed }).trainMessageIndexes,
    ];
    expect(draw(1)).toEqual(draw(1));
    expect(draw(1)).not.toEqual(draw(2));
    expect(draw(1)).toHaveLength(30);
  });

  test('at random, every message is drawn about equally often', () => {
    const corpus = corpusOf([Array.from({ length: 10 }, () => 1)]);
    const drawn = new Array<number>(10).fill(0);
    for (let seed = 0; seed < 1000; seed++) {
      const parts = split(corpus, { by: 'message', order: 'random', train: 0.3, seed });
      for (const message of parts.trainMessageIndexes) drawn[message]++;
    }
    // Binomial(1000, 0.3): standard deviation √210 ≈ 14.5; five of them either way.
    for (const count of drawn) expect(Math.abs(count - 300)).toBeLessThan(73);
  });

  test('one message is refused and block is named', () => {
    expect(() => split(corpusOf([[9]]), { by: 'message', order: 'in_time', train: 0.5 })).toThrow(
      expect.objectContaining({
        name: 'InputError',
        where: expect.objectContaining({ advice: expect.stringContaining('by: block') }),
      }),
    );
  });

  test.each([
    ['message', 0, [[1, 1, 1]], 'train'],
    ['message', 0.3, [[1, 1, 1]], 'train'],
    ['message', 1, [[1, 1, 1]], 'test'],
    ['file', 0.5, [[1, 1]], 'train'],
    ['block', 0.5, [[1]], 'train'],
    ['message', 0.5, [[0, 3]], 'train'],
  ] as const)('by %s, train %d of %j: %s would be empty', (by, train, f, side) => {
    const corpus = corpusOf(f.map((lengths) => [...lengths]));
    expect(() => split(corpus, { by, order: 'in_time', train })).toThrow(
      expect.objectContaining({ message: expect.stringContaining(side) }),
    );
  });
});

describe('repeated messages', () => {
  test('are exactly those that a plain search finds', () => {
    const side = fc.array(fc.array(fc.nat(2), { maxLength: 3 }), { maxLength: 30 });
    const sequenceOf = (messages: number[][]): SymbolSequence => {
      let end = 0;
      return {
        alphabetSize: 3,
        symbols: Uint8Array.from(messages.flat()),
        messageEnds: Uint32Array.from(messages, (m) => {
          end += m.length;
          return end;
        }),
      };
    };
    fc.assert(
      fc.property(side, side, (train, other) => {
        const known = new Set(train.map((m) => m.join()));
        const expected = other.map((m) => (known.has(m.join()) ? 1 : 0));
        expect([...repeatedMessages(sequenceOf(train), sequenceOf(other))]).toEqual(expected);
      }),
    );
  });

  test('are not mistaken for one another where hashes meet', () => {
    // 2 · 10⁵ distinct messages on each side, none on both: of the 4 · 10¹⁰ pairs about nine share a 32-bit hash.
    const count = 200_000;
    const next = seedrandom('hashes');
    const noise = Uint16Array.from({ length: 4 * count }, () => next() * 0x10000);
    // The first two symbols number the message; the others are noise.
    const side = (first: number): SymbolSequence => ({
      alphabetSize: 65536,
      symbols: Uint16Array.from({ length: 4 * count }, (_, i) => {
        const message = first + Math.floor(i / 4);
        if (i % 4 > 1) return noise[(2 * message + (i % 4)) % noise.length];
        return i % 4 === 0 ? message & 0xffff : message >>> 16;
      }),
      messageEnds: Uint32Array.from({ length: count }, (_, i) => 4 * (i + 1)),
    });
    expect(repeatedMessages(side(0), side(count)).includes(1)).toBe(false);
    const half = repeatedMessages(side(0), side(count / 2));
    expect(half.filter((r) => r === 1)).toHaveLength(count / 2);
  });

  test('give the share', () => {
    const corpus = corpusOf([[2, 2, 2, 2, 2, 2]], (i) => [1, 2, 3, 4, 5, 6, 3, 4, 4, 3, 1, 2][i]);
    const parts = split(corpus, { by: 'message', order: 'in_time', train: 0.5 });
    expect([...parts.repeated]).toEqual([1, 0, 1]);
    expect(parts.repeatedShare).toBe(2 / 3);
  });
});
