import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseCandidate, parseCandidates } from '../../src/coders/candidate.ts';
import type { Coder, Setup, Tables } from '../../src/coders/contract.ts';
import type { TableSet } from '../../src/coders/table-set-messages.ts';
import { BugError, CorruptStreamError, InputError } from '../../src/errors/errors.ts';
import { listCells } from '../../src/harness/cells.ts';
import { newSymbolArray, type SymbolSequence, sliceMessages } from '../../src/symbols/sequence.ts';
import { decode, encode, inputOf, train, unitOf } from '../conformance/cells.ts';
import { chunksOf, integers, sequences } from '../conformance/sequences.ts';

const setupOf = (over: Partial<Setup> = {}): Setup => ({
  policy: 'shipped',
  alphabetSize: 256,
  reset: 'message',
  lengths: 'known',
  align: 1,
  ...over,
});

const coderOf = (candidate: string): Coder => parseCandidate(candidate).create();

function sequenceOf(alphabetSize: number, messages: number[][]): SymbolSequence {
  const symbols = newSymbolArray(alphabetSize, messages.flat().length);
  symbols.set(messages.flat());
  let end = 0;
  return {
    alphabetSize,
    symbols,
    messageEnds: Uint32Array.from(messages, (m) => (end += m.length)),
  };
}

/** `size` symbols in which four follow one another with the shares 1/2, 1/4, 1/8 and 1/8, shuffled. */
function dyadicMessage(symbols: readonly number[], size: number, next: () => number): number[] {
  const message = symbols.flatMap((symbol, i) =>
    Array<number>(size / [2, 4, 8, 8][i]).fill(symbol),
  );
  for (let i = message.length - 1; i > 0; i--) {
    const j = next() % (i + 1);
    [message[i], message[j]] = [message[j], message[i]];
  }
  return message;
}

const KINDS = [
  [0, 1, 2, 3],
  [3, 2, 1, 0],
  [1, 0, 3, 2],
] as const;

/** As many messages of each of the first `kinds` kinds, in an order that is drawn. */
function mixture(kinds: number, ofEach: number, size: number, seed: number): SymbolSequence {
  const next = integers(seed);
  const order = Array.from({ length: kinds * ofEach }, (_, i) => i % kinds);
  for (let i = order.length - 1; i > 0; i--) {
    const j = next() % (i + 1);
    [order[i], order[j]] = [order[j], order[i]];
  }
  return sequenceOf(
    4,
    order.map((kind) => dyadicMessage(KINDS[kind], size, next)),
  );
}

const carried = (coder: Coder, setup: Setup, sequence: SymbolSequence) =>
  encode(coder, setup, [sequence]).messageEndsBits.at(-1)!;

describe('tables_in_set=1', () => {
  it.each(['huffman', 'arith:order=1', 'block-huffman:n=2', 'rice', 'deflate-preset'])(
    'gives the bits, the account and the price of %s',
    (candidate) => {
      const own = coderOf(candidate);
      const wrapped = coderOf(`${candidate}${candidate.includes(':') ? ',' : ':'}tables_in_set=1`);
      const cases = fc
        .tuple(
          fc.constantFrom(2, 256),
          fc.constantFrom('known', 'link', 'sent'),
          fc.constantFrom(...(own.declares.reference ? [8, 32] : [1, 8, 64])),
        )
        .chain(([alphabetSize, lengths, align]) =>
          fc.tuple(
            fc.constant(setupOf({ alphabetSize, lengths, align } as Partial<Setup>)),
            sequences(alphabetSize),
          ),
        );
      fc.assert(
        fc.property(cases, ([setup, whole]) => {
          const a = unitOf(own, setup, whole);
          const b = unitOf(wrapped, setup, whole);
          const coded = encode(wrapped, b.encoderSetup, [b.sequence]);
          expect(coded).toEqual(encode(own, a.encoderSetup, [a.sequence]));
          expect(coded.account.indexBits).toBe(0);
          expect(wrapped.price?.(b.sequence, b.encoderSetup)).toEqual(
            own.price?.(a.sequence, a.encoderSetup),
          );
        }),
        { seed: 51, numRuns: 30 },
      );
    },
  );
});

describe('messages of several kinds', () => {
  // Shares 1/2, 1/4, 1/8, 1/8: words of 1, 2, 3 and 3 bits, 1.75 bits a symbol. Two kinds, one the reverse of the other, mix
  // to 5/16, 3/16, 3/16, 5/16: four words of 2 bits, H = 5/8 · log2(16/5) + 3/8 · log2(16/3) bits.
  const mixedEntropy = (5 / 8) * Math.log2(16 / 5) + (3 / 8) * Math.log2(16 / 3);

  it.each([
    [64, 500],
    [16, 500],
    // More messages than the search for tables looks at.
    [16, 12_000],
  ])(
    'of %i symbols: two tables of huffman take 1.75 bits a symbol and a selector',
    (size, ofEach) => {
      const trainPart = mixture(2, ofEach, size, 7);
      const testPart = mixture(2, 50, size, 8);
      const setup = setupOf({ alphabetSize: 4 });
      for (const [candidate, bitsAMessage] of [
        ['huffman', 2 * size],
        ['huffman:tables_in_set=1', 2 * size],
        ['huffman:tables_in_set=2', 1.75 * size + 1],
      ] as const) {
        const coder = coderOf(candidate);
        const tables = train(coder, setup, [trainPart]);
        const coded = encode(coder, { ...setup, tables }, [testPart]);
        expect(coded.messageEndsBits.at(-1), candidate).toBe(100 * bitsAMessage);
        expect(coded.account.indexBits).toBe(candidate === 'huffman:tables_in_set=2' ? 100 : 0);
      }
    },
  );

  it('the ideal of arith falls from the cross-entropy with the mixture to the entropy of each kind', () => {
    const size = 64;
    const setup = setupOf({ alphabetSize: 4 });
    const trainPart = mixture(2, 1000, size, 9);
    const testPart = mixture(2, 100, size, 10);
    const ideal = (candidate: string) => {
      const coder = coderOf(candidate);
      const tables = train(coder, setup, [trainPart]);
      const price = coder.price!(testPart, { ...setup, tables });
      expect(price.fit === undefined).toBe(candidate.includes('set=2'));
      return price.idealBits / testPart.symbols.length;
    };
    // Counts of 64 000 symbols a kind, and totals of 2^12 or more, shift a share by less than 2^-12, so a rate by less than
    // its square over the least share, about 1e-6.
    expect(ideal('arith:order=0')).toBeCloseTo(mixedEntropy, 5);
    expect(ideal('arith:order=0,tables_in_set=2')).toBeCloseTo(1.75, 5);
  });

  it('three kinds take three tables; more than three cost only their selector', () => {
    const setup = setupOf({ alphabetSize: 4 });
    const trainPart = mixture(3, 400, 64, 11);
    const testPart = mixture(3, 40, 64, 12);
    const bitsAMessage = (count: number) => {
      const coder = coderOf(`huffman:tables_in_set=${count}`);
      const tables = train(coder, setup, [trainPart]);
      return carried(coder, { ...setup, tables }, testPart) / 120;
    };
    expect(bitsAMessage(3)).toBe(112 + 2);
    expect(bitsAMessage(4)).toBe(112 + 2);
    expect(bitsAMessage(7)).toBe(112 + 3);
    expect(bitsAMessage(2)).toBeGreaterThan(112 + 1);
  });
});

describe('each message', () => {
  it.each([
    ['huffman', 3],
    ['arith:order=0', 4],
    ['rice', 2],
  ])(
    'of %s takes the table with the fewest bits, of equals the first, behind a selector',
    (inner, count) => {
      const own = coderOf(inner);
      const wrapped = coderOf(`${inner}${inner.includes(':') ? ',' : ':'}tables_in_set=${count}`);
      const selectorBits = Math.ceil(Math.log2(count));
      const cases = fc
        .record({
          lengths: fc.constantFrom('known' as const, 'link' as const, 'sent' as const),
          align: fc.constantFrom(1, 8, 32),
          alphabetSize: fc.constantFrom(3, 256),
        })
        .chain((some) => fc.tuple(fc.constant(setupOf(some)), sequences(some.alphabetSize)));
      fc.assert(
        fc.property(cases, ([setup, whole]) => {
          const unit = unitOf(wrapped, setup, whole);
          const { sequence } = unit;
          const coded = encode(wrapped, unit.encoderSetup, [sequence]);
          const price = wrapped.price!(sequence, unit.encoderSetup);
          const { sets } = unit.encoderSetup.tables as TableSet;
          let selectors = 0;
          let before = 0;
          coded.messageEndsBits.forEach((end, i) => {
            const message = sliceMessages(sequence, i, i + 1);
            const alone = sets.map((tables: Tables) =>
              carried(own, { ...setup, align: 1, tables }, message),
            );
            const least = Math.min(...alone);
            const isEmpty = setup.lengths === 'known' && message.symbols.length === 0;
            const bits = least + (isEmpty ? 0 : selectorBits);
            if (!isEmpty) selectors += selectorBits;
            expect(end - before).toBe(Math.ceil(bits / setup.align) * setup.align);
            if (!isEmpty) {
              let selector = 0;
              for (let at = before; at < before + selectorBits; at++)
                selector = 2 * selector + ((coded.bytes[at >> 3] >> (7 - (at & 7))) & 1);
              expect(selector).toBe(alone.indexOf(least));
              const tables = sets[selector];
              expect(price.messageIdealBits[i]).toBe(
                own.price!(message, { ...setup, tables }).messageIdealBits[0],
              );
            }
            before = end;
          });
          expect(coded.account.indexBits).toBe(selectors);
        }),
        { seed: 52, numRuns: 40 },
      );
    },
  );

  it('that names a table outside the set is refused, with its place', () => {
    const coder = coderOf('huffman:tables_in_set=3');
    const sequence = mixture(3, 20, 16, 13);
    const base = setupOf({ alphabetSize: 4, align: 8 });
    const setup = { ...base, tables: train(coder, base, [sequence]) };
    const coded = encode(coder, setup, [sequence]);
    const input = inputOf(setup, coded, sequence);
    const bytes = input.bytes.slice();
    bytes[coded.messageEndsBits[4] / 8] |= 0b1100_0000;
    let error: unknown;
    try {
      decode(coder, setup, { ...input, bytes }, 10_000);
    } catch (thrown) {
      error = thrown;
    }
    expect(error).toBeInstanceOf(CorruptStreamError);
    expect((error as CorruptStreamError).where).toMatchObject({ messageIndex: 5, got: '3' });
    // What the decoder inside finds wrong is told of the message's place in the unit too.
    const cut = { ...input, bytes: input.bytes.subarray(0, coded.messageEndsBits[7] / 8) };
    expect(() => decode(coder, setup, cut, 10_000)).toThrow(CorruptStreamError);
  });
});

describe('training', () => {
  it.each([
    ['no messages', []],
    ['one message', [[1, 1, 2]]],
    ['two messages for five tables', [[1, 1, 2], [0]]],
    ['only messages without symbols', [[], [], []]],
    ['messages that are all the same', Array.from({ length: 40 }, () => [0, 1, 2, 2])],
  ])('on %s gives five tables, and any message can be coded', (_, messages) => {
    const probe = sequenceOf(4, [[], [3, 3, 3], [0, 1, 2, 3, 0]]);
    for (const candidate of ['huffman:tables_in_set=5', 'arith:order=1,tables_in_set=5']) {
      const coder = coderOf(candidate);
      const base = setupOf({ alphabetSize: 4, lengths: 'sent', align: 8 });
      const tables = train(coder, base, [sequenceOf(4, messages)]);
      expect((tables as TableSet).sets.length).toBe(5);
      const setup = { ...base, tables };
      const coded = encode(coder, setup, [probe]);
      expect(decode(coder, setup, inputOf(setup, coded, probe), 8).sequence).toEqual(probe);
    }
  });

  it('gives the same tables again, however the train split is cut', () => {
    const sequence = mixture(3, 60, 16, 14);
    const setup = setupOf({ alphabetSize: 4 });
    const tables = (chunks: Parameters<typeof train>[2]) =>
      train(coderOf('huffman:tables_in_set=4'), setup, chunks);
    const once = tables([sequence]);
    expect(tables([sequence])).toEqual(once);
    expect(tables(chunksOf(sequence, [5, 100, 700, 701]))).toEqual(once);
  });

  it('never takes the tables of one coder for those of another', () => {
    const setup = setupOf({ alphabetSize: 4 });
    const tables = train(coderOf('huffman:tables_in_set=2'), setup, [mixture(2, 5, 16, 15)]);
    for (const other of ['rice:tables_in_set=2', 'huffman:tables_in_set=3', 'huffman'])
      expect(() => coderOf(other).encoder({ ...setup, tables })).toThrow(BugError);
    expect(() => coderOf('huffman:tables_in_set=2').encoder(setup)).toThrow(BugError);
  });
});

describe('the key', () => {
  it('stands before those of other wrappers, and goes with ranges', () => {
    expect(parseCandidates('rice:tables_in_set=1..3,stored=on').map(({ id }) => id)).toEqual([
      'rice:tables_in_set=1,stored=on',
      'rice:tables_in_set=2,stored=on',
      'rice:tables_in_set=3,stored=on',
    ]);
    expect(parseCandidate('arith:after=delta,tables_in_set=2,order=1')).toMatchObject({
      id: 'arith:order=1,tables_in_set=2,after=delta',
      values: { order: 1, tables_in_set: 2, after: 'delta' },
    });
  });

  it.each(['0', '65', 'two', '', '1.5'])('is refused with the value "%s"', (value) => {
    expect(() => parseCandidate(`huffman:tables_in_set=${value}`)).toThrow(InputError);
  });

  it.each(['fixed', 'deflate', 'brotli', 'rice:k=2'])(
    'is refused for %s, which has no shipped tables',
    (name) => {
      const colon = name.includes(':') ? ',' : ':';
      expect(() => parseCandidate(`${name}${colon}tables_in_set=2`)).toThrow(/no shipped tables/);
    },
  );

  it('gives a cell under shipped tables alone', () => {
    const candidate = parseCandidate('arith:order=0,tables_in_set=2');
    const { cells } = listCells(
      ['a'],
      [candidate],
      ['shipped', 'sent', 'learned'],
      ['message', 'file'],
    );
    expect(cells.map(({ id }) => id)).toEqual(['a/arith:order=0,tables_in_set=2@shipped/message']);
    expect(() => candidate.create().check!(setupOf({ policy: 'learned' }))).toThrow(InputError);
  });

  it('says what it costs at each end', () => {
    const { declaration } = parseCandidate('huffman:tables_in_set=6');
    expect(declaration.memory).toMatch(/each of 6 tables.*encoder the unit.*train split/);
    expect(declaration.worstCase).toMatch(/selector/);
    expect(declaration.needsWholeMessage).toBe(true);
  });

  it('adds its selector to what a decoder holds before its first symbol', () => {
    const holds = (candidate: string) => {
      const coder = coderOf(candidate);
      const setup = setupOf();
      const sequence = sequenceOf(256, [[1, 2], [3]]);
      return coder.decoderHolds!({ ...setup, tables: train(coder, setup, [sequence]) });
    };
    const own = holds('huffman') as number;
    expect(holds('huffman:tables_in_set=1')).toBe(own);
    expect(holds('huffman:tables_in_set=2')).toBe(own + 1);
    expect(holds('deflate-preset:tables_in_set=2')).toBe('message');
  });

  it('shows each table of the set', () => {
    const coder = coderOf('huffman:tables_in_set=2');
    const setup = setupOf({ alphabetSize: 4 });
    const lines = coder.describeTables!(train(coder, setup, [mixture(2, 5, 16, 16)]), setup);
    expect(lines.filter((line) => line.startsWith('table '))).toEqual([
      'table 0 of 2:',
      'table 1 of 2:',
    ]);
  });
});
