/**
 * Filled messages against a filler by brute force: each message is grown unit by unit, each length coded by an encoder of
 * its own that knows nothing of filling, until the first that is over the budget.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Coded, Coder, Lengths, Setup, TablePolicy } from '../../src/coders/contract.ts';
import { TryingFiller } from '../../src/coders/fill.ts';
import { BugError, CorruptStreamError, InputError, LimitError } from '../../src/errors/errors.ts';
import { parseRecordField } from '../../src/symbols/record.ts';
import { newSymbolArray, type SymbolSequence, sliceMessages } from '../../src/symbols/sequence.ts';
import { decode, encode, train } from '../conformance/cells.ts';
import { damaged } from '../conformance/damage.ts';
import { chunksOf, integers } from '../conformance/sequences.ts';

const LENGTHS: Lengths[] = ['known', 'link', 'sent'];
const ALIGNS = [1, 8, 16, 32, 64];
const RECORD = {
  bytes: 3,
  fields: [parseRecordField('a', 'u8@0', 3), parseRecordField('b', 'u16le@1', 3)],
};

/** Units of drifting symbols: neighbours resemble one another, so that models learn something. */
function unitsOf(alphabetSize: number, sizes: readonly number[], seed: number): SymbolSequence {
  const next = integers(seed);
  const total = sizes.reduce((sum, size) => sum + size, 0);
  const symbols = newSymbolArray(alphabetSize, total);
  const messageEnds = new Uint32Array(sizes.length);
  let at = 0;
  let level = next() % alphabetSize;
  sizes.forEach((size, i) => {
    if (next() % 4 === 0) level = next() % alphabetSize;
    for (let j = 0; j < size; j++) {
      const noise = next();
      symbols[at++] =
        noise % 5 === 0 ? (noise >>> 8) % alphabetSize : (level + (j % 2)) % alphabetSize;
    }
    messageEnds[i] = at;
  });
  return { alphabetSize, symbols, messageEnds };
}

interface Case {
  readonly setup: Setup;
  readonly test: SymbolSequence;
}

/** A setup with budget, and what is to be coded; `shipped` and `primed` train on units of their own. */
function caseOf(
  coder: Coder,
  policy: TablePolicy,
  shape: {
    lengths: Lengths;
    align: number;
    bytes: number;
    fixed: boolean;
    seed: number;
    m: number;
  },
  more: Partial<Setup> = {},
): Case {
  const { lengths, align, bytes, fixed, seed, m } = shape;
  const next = integers(seed + 7);
  const step = more.record?.bytes ?? 1;
  const size = step * (1 + (next() % 4));
  const count = 2 + (next() % 24);
  const sizes = () =>
    Array.from({ length: count }, () => (fixed ? size : step * (1 + (next() % 5))));
  const base: Setup = {
    ...more,
    policy,
    alphabetSize: m,
    reset: 'message',
    lengths,
    align,
    fill: { bytes },
    ...(fixed ? { unitSymbols: size } : {}),
  };
  const tables =
    policy === 'shipped' || policy === 'primed'
      ? { tables: train(coder, base, [unitsOf(m, sizes(), seed + 1)]) }
      : {};
  return { setup: { ...base, ...tables }, test: unitsOf(m, sizes(), seed) };
}

function withoutFill({ fill: _, ...setup }: Setup): Setup {
  return setup;
}

function bitsAlone(coder: Coder, setup: Setup, message: SymbolSequence): number {
  const { messageEndsBits } = encode(coder, withoutFill(setup), [message]);
  return messageEndsBits[0];
}

/** Symbol ends of messages, grown one unit at a time; undefined where a unit is over the budget alone. */
function bruteForce(
  coder: Coder,
  setup: Setup,
  { symbols, messageEnds, alphabetSize }: SymbolSequence,
) {
  const ends: number[] = [];
  let from = 0;
  let end = 0;
  let i = 0;
  while (i < messageEnds.length) {
    const whole = symbols.subarray(from, messageEnds[i]);
    const bits = bitsAlone(coder, setup, {
      alphabetSize,
      symbols: whole,
      messageEnds: Uint32Array.of(whole.length),
    });
    if (bits <= setup.fill!.bytes * 8) {
      end = messageEnds[i++];
    } else {
      if (end === from) return undefined;
      ends.push(end);
      from = end;
    }
  }
  if (end > from) ends.push(end);
  return Uint32Array.from(ends);
}

function sameCoded(got: Coded, expected: Coded) {
  expect(Buffer.compare(got.bytes, expected.bytes), 'the same bytes').toBe(0);
  expect(got.messageEndsBits).toEqual(expected.messageEndsBits);
  expect(got.account).toEqual(expected.account);
  expect(got.payloadBits).toBeCloseTo(expected.payloadBits, 6);
}

function check(coder: Coder, { setup, test }: Case) {
  const ends = bruteForce(coder, setup, test);
  if (ends === undefined) {
    expect(() => encode(coder, setup, [test])).toThrow(InputError);
    return;
  }
  const coded = encode(coder, setup, [test]);
  expect(coded.symbolEnds).toEqual(ends);
  const messages = { ...test, messageEnds: ends };
  sameCoded(coded, encode(coder, withoutFill(setup), [messages]));
  if (coder.filler?.(setup) !== undefined) {
    const slow = new TryingFiller(coder, setup);
    slow.push(test);
    const tried = slow.finish();
    expect(tried.symbolEnds).toEqual(ends);
    sameCoded(coded, tried);
  }
  const counts = ends.map((end, i) => end - (i === 0 ? 0 : ends[i - 1]));
  const input = {
    bytes: coded.bytes,
    messageCount: ends.length,
    ...(setup.lengths === 'link' ? { messageEndsBits: coded.messageEndsBits } : {}),
    ...(setup.lengths === 'known' ? { symbolCounts: counts } : {}),
  };
  const decoded = decode(coder, withoutFill(setup), input, test.symbols.length);
  expect(decoded.sequence.symbols).toEqual(test.symbols);
  expect(decoded.sequence.messageEnds).toEqual(ends);
  expect(decoded.bitsConsumed).toBe(coded.messageEndsBits.at(-1) ?? 0);
}

const shapes = (alphabetSizes: number[], most = 24) =>
  fc.record({
    lengths: fc.constantFrom(...LENGTHS),
    align: fc.constantFrom(...ALIGNS),
    bytes: fc.integer({ min: 1, max: most }),
    fixed: fc.boolean(),
    seed: fc.nat({ max: 1 << 30 }),
    m: fc.constantFrom(...alphabetSizes),
  });

const CANDIDATES: [string, number[], number, Partial<Setup>?][] = [
  ['fixed', [1, 2, 3, 256], 60],
  ['huffman', [1, 2, 3, 256], 60],
  ['huffman:stored=on', [1, 2, 5, 256], 25],
  ['huffman:after=delta', [2, 5, 256], 25],
  ['huffman:tables_in_set=2', [2, 5, 256], 25],
  ['arith:order=0,tables_in_set=3,stored=on', [2, 256], 15],
  ['block-huffman:n=2', [1, 2, 3], 40],
  ['block-huffman:n=3', [2, 3], 25],
  ['arith:order=0', [1, 2, 3, 256], 50],
  ['arith:order=1', [1, 2, 3, 256], 50],
  ['arith:order=3', [2, 3, 256], 25],
  ['arith:order=1,backoff=none,range=32', [1, 2, 3], 40],
  ['arith:order=1,unseen=add:1/2', [2, 3, 256], 25],
  ['arith:order=1,position=3', [2, 3, 256], 25],
  ['arith:order=1,stored=on,after=delta.zigzag', [3, 256], 15],
  ['arith:order=0,after=byte-planes', [300], 15],
  ['rice', [2, 5, 256], 25],
  ['rice:k=1,after=delta.zigzag', [5, 256], 25],
  ['exp-golomb', [2, 256], 20],
  ['golomb', [2, 256], 20],
  ['deflate', [256], 12],
  ['deflate-huffman', [256], 12],
  ['deflate-preset', [256], 8],
  ['brotli', [256], 6],
  ['fields:auto', [256], 40, { record: RECORD }],
  ['fields:map=a:delta+b:xor/value', [256], 25, { record: RECORD }],
];

describe('fill', () => {
  for (const [candidate, alphabetSizes, runs, more] of CANDIDATES) {
    const { declaration, create } = parseCandidate(candidate);
    for (const policy of declaration.policies) {
      it(`${candidate}, ${policy}: messages are those of brute force`, () => {
        const coder = create();
        fc.assert(
          fc.property(shapes(alphabetSizes), (shape) =>
            check(coder, caseOf(coder, policy, shape, more)),
          ),
          { seed: 20_261_201, numRuns: runs },
        );
      });
    }
  }

  it('is cut at the bit: a unit of one bit less, as many, one more than the budget', () => {
    const coder = parseCandidate('fixed').create();
    const unitsFor = (unitSymbols: number, count: number, lengths: Lengths) => {
      const setup: Setup = {
        policy: 'none',
        alphabetSize: 2,
        reset: 'message',
        lengths,
        align: 1,
        fill: { bytes: 4 },
        unitSymbols,
      };
      const test = unitsOf(
        2,
        Array.from({ length: count }, () => unitSymbols),
        3,
      );
      return encode(coder, setup, [test]).symbolEnds!.length;
    };
    // 32 bits: closed form, a bit a symbol.
    expect(unitsFor(31, 6, 'known')).toBe(6);
    expect(unitsFor(32, 6, 'known')).toBe(6);
    expect(() => unitsFor(33, 6, 'known')).toThrow(InputError);
    expect(unitsFor(15, 6, 'known')).toBe(3);
    expect(unitsFor(16, 6, 'known')).toBe(3);
    expect(unitsFor(17, 6, 'known')).toBe(6);
    // Elias delta of 1 + 1 takes 4 bits, of 2 + 1 too, of 3 + 1 5 bits (Elias 1975).
    expect(unitsFor(28, 6, 'link')).toBe(6);
    expect(() => unitsFor(29, 6, 'link')).toThrow(InputError);
    expect(unitsFor(14, 6, 'sent')).toBe(3);
    expect(unitsFor(15, 6, 'sent')).toBe(6);
    expect(unitsFor(9, 6, 'link')).toBe(2);
    expect(unitsFor(10, 6, 'link')).toBe(3);
  });

  it('says which unit never fits, its size and the budget', () => {
    for (const candidate of ['fixed', 'huffman:stored=on']) {
      const coder = parseCandidate(candidate).create();
      const setup: Setup = {
        policy: candidate === 'fixed' ? 'none' : 'sent',
        alphabetSize: 256,
        reset: 'message',
        lengths: 'known',
        align: 8,
        fill: { bytes: 8 },
      };
      const test = unitsOf(256, [3, 4, 2, 200, 1], 5);
      expect(() => encode(coder, setup, [test])).toThrow(/unit 3 does not fit/);
      try {
        encode(coder, setup, [test]);
      } catch (error) {
        const { where } = error as InputError;
        expect(where.expected).toContain('at most 8 bytes');
        expect(where.got).toMatch(
          candidate === 'fixed' ? /\(200 bytes\)/ : /\(201 bytes\)|bytes\)/,
        );
      }
    }
  });

  it('gives nothing for no units', () => {
    for (const candidate of ['fixed', 'huffman', 'arith:order=1', 'deflate']) {
      const { declaration, create } = parseCandidate(candidate);
      const coder = create();
      const setup: Setup = {
        policy: declaration.policies.includes('none') ? 'none' : 'sent',
        alphabetSize: 256,
        reset: 'message',
        lengths: 'link',
        align: 8,
        fill: { bytes: 8 },
      };
      const coded = encode(coder, setup, [unitsOf(256, [], 1)]);
      expect(coded.bytes.length).toBe(0);
      expect(coded.symbolEnds).toEqual(new Uint32Array(0));
    }
  });

  it('refuses messages that do not decode alone', () => {
    const setup: Setup = {
      policy: 'learned',
      alphabetSize: 2,
      reset: 'never',
      lengths: 'link',
      align: 8,
      fill: { bytes: 8 },
    };
    expect(() => parseCandidate('arith:order=0').create().encoder(setup)).toThrow(BugError);
  });

  for (const candidate of [
    'huffman',
    'arith:order=1',
    'fields:auto',
    'fixed',
    'block-huffman:n=2',
  ]) {
    it(`${candidate}: any cut into chunks gives the same bytes, tables too`, () => {
      const { declaration, create } = parseCandidate(candidate);
      const coder = create();
      const policy = declaration.policies.includes('shipped') ? 'shipped' : 'none';
      const setup: Setup = {
        policy,
        alphabetSize: 256,
        reset: 'message',
        lengths: 'link',
        align: 8,
        fill: { bytes: 96 },
        unitSymbols: 12,
        record: RECORD,
      };
      // Above 65 536 symbols, from which on messages are made before the end.
      const whole = unitsOf(
        256,
        Array.from({ length: 18_000 }, () => 12),
        9,
      );
      const trained = sliceMessages(whole, 0, 3000);
      const cuts = (sequence: SymbolSequence, seed: number) => {
        const next = integers(seed);
        const places = Array.from({ length: 9 }, () => next() % sequence.symbols.length);
        return chunksOf(sequence, places);
      };
      const tables = policy === 'none' ? {} : { tables: train(coder, setup, [trained]) };
      const test = sliceMessages(whole, 3000, 18_000);
      const expected = encode(coder, { ...setup, ...tables }, [test]);
      expect(expected.symbolEnds!.length).toBeGreaterThan(500);
      for (const seed of [1, 2, 3]) {
        const other = policy === 'none' ? {} : { tables: train(coder, setup, cuts(trained, seed)) };
        const coded = encode(coder, { ...setup, ...other }, cuts(test, seed));
        sameCoded(coded, expected);
        expect(coded.symbolEnds).toEqual(expected.symbolEnds);
      }
      const encoder = coder.encoder({ ...setup, ...tables });
      encoder.push(chunksOf(test, [test.symbols.length - 1])[0]);
      expect(() => encoder.finish()).toThrow(BugError);
    });
  }

  for (const candidate of [
    'huffman',
    'arith:order=1',
    'fields:auto',
    'rice:k=2',
    'block-huffman:n=2',
    'huffman:stored=on',
  ]) {
    it(`${candidate}: damaged messages of units give a typed error or a bounded decode`, () => {
      const { declaration, create } = parseCandidate(candidate);
      const coder = create();
      const policy = declaration.policies.includes('shipped') ? 'shipped' : 'none';
      fc.assert(
        fc.property(shapes([256]), (drawn) => {
          const shape = { ...drawn, fixed: true, bytes: 128 };
          const { setup, test } = caseOf(coder, policy, shape, { record: RECORD });
          const coded = encode(coder, setup, [test]);
          const ends = coded.symbolEnds!;
          const input = {
            bytes: coded.bytes,
            messageCount: ends.length,
            ...(setup.lengths === 'link' ? { messageEndsBits: coded.messageEndsBits } : {}),
            ...(setup.lengths === 'known'
              ? { symbolCounts: ends.map((end, i) => end - (i === 0 ? 0 : ends[i - 1])) }
              : {}),
          };
          const maxSymbols = 2 * test.symbols.length + 64;
          for (const other of damaged(input, shape.seed, setup.align)) {
            try {
              const { sequence } = decode(coder, withoutFill(setup), other, maxSymbols);
              expect(sequence.symbols.length).toBeLessThanOrEqual(maxSymbols);
            } catch (error) {
              if (!(error instanceof CorruptStreamError || error instanceof LimitError))
                throw error;
            }
          }
        }),
        { seed: 20_261_202, numRuns: 25 },
      );
    });
  }
});
