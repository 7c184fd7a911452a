import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { type Candidate, parseCandidate } from '../../src/coders/candidate.ts';
import type { Coder, Reset, TablePolicy } from '../../src/coders/contract.ts';
import { coderEntries } from '../../src/coders/registry.ts';
import { CorruptStreamError, InputError } from '../../src/errors/errors.ts';
import { type Cell, listCells } from '../../src/harness/cells.ts';
import type { CorpusData } from '../../src/harness/corpus-data.ts';
import { runRecordSchema } from '../../src/harness/run-record.ts';
import { timeCell } from '../../src/harness/time-cell.ts';
import { checkPacer } from '../../src/harness/time-pacer.ts';
import { leadingPart } from '../../src/harness/time-part.ts';
import { timesRecordOf } from '../../src/harness/time-record.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

/** Messages of unlike lengths, 48 symbols on average, in records of 24. */
function messages(count: number): SymbolSequence {
  const messageEnds = new Uint32Array(count);
  for (let i = 0; i < count; i++)
    messageEnds[i] = (i === 0 ? 0 : messageEnds[i - 1]) + 24 * (1 + (i % 3));
  const symbols = Uint8Array.from({ length: messageEnds[count - 1] ?? 0 }, (_, i) => (i * i) % 23);
  return { alphabetSize: 256, symbols, messageEnds };
}

function corpusOf(test: SymbolSequence, more: Partial<CorpusData> = {}): CorpusData {
  const half = test.messageEnds.length >> 1;
  return {
    name: 'c',
    key: 'c',
    sha256: '',
    symbolsAs: 'bytes',
    messagesAs: 'lines',
    lengths: 'link',
    alphabetSize: test.alphabetSize,
    sourceBytes: 2 * test.symbols.length,
    train: messages(40),
    test,
    testFiles: [
      { path: 'a', sha256: 'a', messageEnd: half },
      { path: 'b', sha256: 'b', messageEnd: test.messageEnds.length },
    ],
    ...more,
  };
}

function cellsOf(
  candidate: Candidate,
  policies: readonly TablePolicy[] = ['shipped', 'sent', 'learned', 'primed'],
  resets: readonly Reset[] = ['message'],
): readonly Cell[] {
  return listCells(['c'], [candidate], policies, resets).cells;
}

/** A clock on which each look takes a millisecond: every run lasts so long, and what `costs` adds. */
class Clock {
  now = 0;
  readonly look = (): number => {
    this.now += 0.001;
    return this.now;
  };
}

interface Costs {
  readonly setUp: number;
  readonly perSymbol: number;
  readonly perMessage: number;
}

/** `fixed`, each of whose ends moves the clock by what is said. */
function costly(clock: Clock, encode: Costs, decode: Costs): Candidate {
  const fixed = parseCandidate('fixed');
  const spend = (costs: Costs, symbolCount: number, messageCount: number) => {
    clock.now += costs.perSymbol * symbolCount + costs.perMessage * messageCount;
  };
  return {
    ...fixed,
    create: (): Coder => {
      const inner = fixed.create();
      return {
        ...inner,
        declares: inner.declares,
        encoder(setup) {
          clock.now += encode.setUp;
          const encoder = inner.encoder(setup);
          return {
            push: (chunk) => {
              spend(encode, chunk.symbols.length, chunk.messageEnds.length);
              encoder.push(chunk);
            },
            finish: () => encoder.finish(),
          };
        },
        decoder(setup, limits) {
          clock.now += decode.setUp;
          const decoder = inner.decoder(setup, limits);
          return {
            decode: (input) => {
              const decoded = decoder.decode(input);
              spend(decode, decoded.sequence.symbols.length, input.messageCount);
              return decoded;
            },
          };
        },
      };
    },
  };
}

describe('the times of a cell', () => {
  test('tell coding, set-up and messages apart, at each end', () => {
    const clock = new Clock();
    const candidate = costly(
      clock,
      { setUp: 0.004, perSymbol: 2e-7, perMessage: 1e-5 },
      { setUp: 0.009, perSymbol: 4e-7, perMessage: 2e-5 },
    );
    const corpus = corpusOf(messages(200));
    const symbolCount = corpus.test.symbols.length;
    const [cell] = cellsOf(candidate);
    const times = timeCell(cell, corpus, { repeats: 7 }, clock.look)!;
    expect(times).toMatchObject({ pacer: 'deflate-huffman', symbolCount, messageCount: 200 });
    for (const [end, setUp, perSymbol, perMessage] of [
      ['encode', 0.004, 2e-7, 1e-5],
      ['decode', 0.009, 4e-7, 2e-5],
    ] as const) {
      const found = times[end];
      const run = 0.001 + perSymbol * symbolCount + perMessage * 200;
      expect(found.seconds).toHaveLength(7);
      for (const seconds of found.seconds) expect(seconds).toBeCloseTo(run, 9);
      for (const seconds of found.pacerSeconds) expect(seconds).toBeCloseTo(0.001, 9);
      expect(found).toMatchObject({ rounds: 1, unsteady: false });
      expect(found.median).toBeCloseTo(run, 9);
      expect(found.p95).toBeCloseTo(run, 9);
      expect(found.speed).toBeCloseTo(0.001 / run, 9);
      expect(found.low).toBeCloseTo(0.001 / run, 9);
      expect(found.high).toBeCloseTo(0.001 / run, 9);
      expect(found.setUp!.seconds).toBeCloseTo(0.001 + setUp, 9);
      expect(found.perMessage!.seconds).toBeCloseTo(perMessage, 9);
      // The pacer codes all symbols in a millisecond.
      expect(found.setUp!.pacerSymbols).toBeCloseTo((0.001 + setUp) * 1000 * symbolCount, 3);
      expect(found.perMessage!.pacerSymbols).toBeCloseTo(perMessage * 1000 * symbolCount, 3);
    }
  });

  test('are those of the beginning, the smaller the slower the cell is', () => {
    const corpus = corpusOf(messages(2 ** 13));
    expect(corpus.test.symbols.length).toBeGreaterThan(2 ** 18);
    const timedSymbols = (perSymbol: number) => {
      const clock = new Clock();
      const costs = { setUp: 0, perSymbol, perMessage: 0 };
      const [cell] = cellsOf(costly(clock, costs, { ...costs, perSymbol: 0 }));
      return timeCell(cell, corpus, { repeats: 1 }, clock.look)!.symbolCount;
    };
    // Runs of at most a twentieth of a second: messages of at most 72 symbols leave that much open.
    expect(timedSymbols(1e-5)).toBeLessThanOrEqual(2 ** 14);
    expect(timedSymbols(5e-7)).toBeGreaterThan(2 ** 16 - 72);
    expect(timedSymbols(5e-7)).toBeLessThanOrEqual(2 ** 16);
    expect(timedSymbols(0)).toBeGreaterThan(2 ** 16);
  });

  test('end near their bound for a slow cell, but not before three samples', () => {
    const clock = new Clock();
    const costs = { setUp: 0, perSymbol: 1e-3, perMessage: 0 };
    const [cell] = cellsOf(costly(clock, costs, costs));
    // A run takes 0.96 s, its bound is 2.2 s.
    const times = timeCell(cell, corpusOf(messages(20)), { repeats: 20 }, clock.look)!;
    expect(times.encode.seconds).toHaveLength(3);
    expect(times.decode.seconds).toHaveLength(3);
  });

  test('have a pacer of the plan’s choice', () => {
    const clock = new Clock();
    const [cell] = cellsOf(parseCandidate('huffman'), ['shipped']);
    const times = timeCell(
      cell,
      corpusOf(messages(20)),
      { repeats: 1, pacer: 'fixed' },
      clock.look,
    )!;
    expect(times.pacer).toBe('fixed');
    expect(() =>
      timeCell(cell, corpusOf(messages(20)), { repeats: 1, pacer: 'huffman' }, clock.look),
    ).toThrow(/huffman cannot be the pacer, since it needs tables/);
  });

  test('are none where there is nothing to code', () => {
    const [cell] = cellsOf(parseCandidate('fixed'));
    expect(timeCell(cell, corpusOf(messages(0)), { repeats: 1 })).toBeUndefined();
  });

  test('of coders that do not give back what they were given do not exist', () => {
    const fixed = parseCandidate('fixed');
    const wrong: Candidate = {
      ...fixed,
      create: () => {
        const inner = fixed.create();
        return {
          ...inner,
          declares: inner.declares,
          encoder: (setup) => inner.encoder(setup),
          decoder: (setup, limits) => ({
            decode: (input) => {
              const decoded = inner.decoder(setup, limits).decode(input);
              decoded.sequence.symbols[5] ^= 1;
              return decoded;
            },
          }),
        };
      },
    };
    const [cell] = cellsOf(wrong);
    expect(() => timeCell(cell, corpusOf(messages(20)), { repeats: 1 })).toThrow(
      CorruptStreamError,
    );
  });

  test('follow the seed of the cell alone', () => {
    const [cell] = cellsOf(parseCandidate('arith:order=1'), ['learned']);
    const timed = () => timeCell(cell, corpusOf(messages(20)), { repeats: 6 }, new Clock().look);
    expect(timed()).toEqual(timed());
  });

  test('pass between threads as they are', () => {
    const [cell] = cellsOf(parseCandidate('huffman'), ['shipped']);
    const times = timeCell(cell, corpusOf(messages(20)), { repeats: 2 }, new Clock().look)!;
    expect(structuredClone(times)).toEqual(times);
  });
});

describe('every cell can be timed', () => {
  const framings: readonly [string, Partial<CorpusData>][] = [
    ['lengths known', { lengths: 'known' }],
    ['lengths sent', { lengths: 'sent' }],
    ['fill', { fill: { bytes: 96, unitSymbols: 24 } as CorpusData['fill'] & object }],
  ];
  const names = coderEntries
    .filter(({ declaration }) => declaration.needsRecord !== true)
    .map(({ declaration: { name, parameters } }) => {
      const required = parameters
        .map(({ key }) => key)
        .find((key) => key === 'n' || key === 'order');
      return required === undefined ? name : `${name}:${required}=2`;
    });

  test.each(framings)('%s', (_, framing) => {
    const corpus = corpusOf(messages(24), framing);
    const filled = framing.fill === undefined ? undefined : new Set(['c']);
    const candidates = [
      ...names,
      'huffman:stored=on',
      'huffman:tables_in_set=2',
      'rice:after=delta',
    ].map(parseCandidate);
    const { cells } = listCells(
      ['c'],
      candidates,
      ['shipped', 'sent', 'learned', 'primed'],
      filled === undefined ? ['message', 'file', 'never', 'message*5'] : ['message'],
      filled === undefined ? {} : { filled },
    );
    expect(cells.length).toBeGreaterThanOrEqual(names.length);
    for (const cell of cells) {
      const times = timeCell(cell, corpus, { repeats: 1 }, new Clock().look)!;
      const { encode, decode, buildTables } = times;
      for (const end of [encode, decode]) {
        expect(end.speed, cell.id).toBeGreaterThan(0);
        expect(end.setUp, cell.id).toBeDefined();
        expect(end.perMessage === undefined, cell.id).toBe(filled !== undefined);
      }
      const hasTables =
        ['shipped', 'primed'].includes(cell.policy) ||
        (cell.policy === 'sent' && cell.reset !== 'message');
      expect(buildTables !== undefined, cell.id).toBe(hasTables);
      const parts = timesRecordOf(times);
      const { shape } = runRecordSchema.shape.cells.element;
      for (const key of ['timed', 'encode', 'decode', 'table_build'] as const)
        expect(shape[key].safeParse(parts[key]).error, `${cell.id} ${key}`).toBeUndefined();
    }
  });

  test('one message alone has no cost of a message', () => {
    const corpus = corpusOf({ ...messages(1) });
    const [cell] = cellsOf(parseCandidate('huffman'), ['shipped']);
    const times = timeCell(cell, corpus, { repeats: 1 }, new Clock().look)!;
    expect(times.encode.perMessage).toBeUndefined();
    expect(times.decode.perMessage).toBeUndefined();
  });
});

describe('the beginning of a corpus', () => {
  test('is whole messages, or whole records of a long first one', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 40 }),
        fc.integer({ min: 24, max: 2000 }),
        (count, most) => {
          const corpus = corpusOf(messages(count), { record: { bytes: 24, fields: [] } });
          const { test, testFiles } = leadingPart(corpus, most);
          const { symbols, messageEnds } = corpus.test;
          expect(test.symbols).toEqual(symbols.subarray(0, test.symbols.length));
          expect(test.symbols.length).toBeLessThanOrEqual(Math.max(most, 24));
          expect(test.symbols.length % 24).toBe(0);
          const whole = messageEnds.filter((end) => end <= most).length;
          expect(test.messageEnds.length).toBe(Math.max(1, whole));
          if (whole > 0) expect(test.messageEnds).toEqual(messageEnds.slice(0, whole));
          expect(testFiles.at(-1)!.messageEnd).toBe(test.messageEnds.length);
        },
      ),
    );
  });

  test('is the corpus itself where that is short', () => {
    const corpus = corpusOf(messages(3));
    expect(leadingPart(corpus, corpus.test.symbols.length)).toBe(corpus);
  });
});

describe('a pacer', () => {
  const corpora = [corpusOf(messages(3))];

  test.each(['deflate-huffman', 'brotli', 'fixed', 'deflate:level=1'])('may be %s', (id) => {
    expect(() => checkPacer(id, corpora)).not.toThrow();
  });

  test.each([
    ['huffman', /huffman cannot be the pacer, since it needs tables/],
    ['deflate-preset', /deflate-preset cannot be the pacer, since it needs tables/],
    ['deflat', /there is no coder named "deflat"/],
    ['arith:order=0..2', /stands for 3 candidates/],
  ])('may not be %s', (id, message) => {
    expect(() => checkPacer(id, corpora)).toThrow(message);
    expect(() => checkPacer(id, corpora)).toThrow(InputError);
    try {
      checkPacer(id, corpora);
    } catch (error) {
      expect((error as InputError).where.key).toBe('timing.pacer');
    }
  });
});
