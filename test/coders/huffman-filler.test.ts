/**
 * Messages filled in one pass against the same words counted first: another filler, which writes whole messages with the
 * plain encoder. Units, budgets and words of all sizes; what brute force gives for short ones is in fill.test.ts.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Coded, Encoder, Setup } from '../../src/coders/contract.ts';
import { countingFiller } from '../../src/coders/fill-counted.ts';
import { streamEncoder } from '../../src/coders/huffman-encoder.ts';
import { wordFiller } from '../../src/coders/huffman-filler.ts';
import { InputError } from '../../src/errors/errors.ts';
import { PrefixEncoder } from '../../src/stages/prefix-encoder.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';
import { chunksOf, integers } from '../conformance/sequences.ts';

/** A canonical code whose words have these lengths, for symbols 0, 1, 2 … */
function wordsOf(lengths: readonly number[]): PrefixEncoder {
  const words = new PrefixEncoder(lengths.length);
  words.setWords(
    Uint32Array.from(lengths, (_, symbol) => symbol),
    Uint8Array.from(lengths),
    lengths.length,
  );
  return words;
}

const CODES: Record<string, number[]> = {
  'one bit': [1, 1],
  'up to 32 bits': Array.from({ length: 33 }, (_, i) => Math.min(i + 1, 32)),
  'a short word and many long ones': Array.from({ length: 256 }, (_, i) => (i === 0 ? 1 : 9)),
  'a byte': new Array<number>(256).fill(8),
};

function unitsOf(
  alphabetSize: number,
  seed: number,
  sizeOf: (next: () => number) => number,
  symbolCount: number,
): SymbolSequence {
  const next = integers(seed);
  const ends: number[] = [];
  for (let end = 0; end < symbolCount; ) {
    end += sizeOf(next);
    ends.push(end);
  }
  const symbols = new Uint8Array(ends.at(-1) ?? 0);
  let spread = alphabetSize;
  for (let i = 0; i < symbols.length; i++) {
    // Stretches of mostly short, and of long words: what the message before says of the next is often wrong.
    if (next() % 512 === 0) spread = 1 + (next() % alphabetSize);
    symbols[i] = next() % spread;
  }
  return { alphabetSize, symbols, messageEnds: Uint32Array.from(ends) };
}

/** What comes out, or the words of the refusal. */
function outcome(encoder: Encoder, sequence: SymbolSequence, places: number[]): Coded | string {
  try {
    for (const chunk of chunksOf(sequence, places)) encoder.push(chunk);
    return encoder.finish();
  } catch (error) {
    if (error instanceof InputError) return `${error.message} ${JSON.stringify(error.where)}`;
    throw error;
  }
}

describe('filling with words in one pass', () => {
  for (const [name, lengths] of Object.entries(CODES)) {
    it(`${name}: gives the messages, bits and refusals of counting first`, () => {
      fc.assert(
        fc.property(
          fc.record({
            lengths: fc.constantFrom('known', 'link', 'sent'),
            align: fc.constantFrom(1, 2, 4, 8, 16, 24, 32, 64),
            bytes: fc.oneof(
              fc.integer({ min: 1, max: 40 }),
              fc.integer({ min: 40, max: 600 }),
              fc.integer({ min: 8150, max: 8250 }),
            ),
            unitSymbols: fc.constantFrom(undefined, 1, 2, 3, 7, 24),
            longUnit: fc.constantFrom(0, 0, 0, 5000),
            symbolCount: fc.constantFrom(0, 300, 5000, 40_000, 70_000),
            cuts: fc.array(fc.nat({ max: 70_000 }), { maxLength: 3 }),
            seed: fc.nat({ max: 1 << 30 }),
          }),
          ({ lengths: granted, align, bytes, unitSymbols, longUnit, symbolCount, cuts, seed }) => {
            const sequence = unitsOf(
              lengths.length,
              seed,
              (next) => {
                if (unitSymbols !== undefined) return unitSymbols;
                return longUnit > 0 && next() % 400 === 0 ? longUnit : next() % 20;
              },
              symbolCount,
            );
            const plain: Setup = {
              policy: 'shipped',
              alphabetSize: lengths.length,
              reset: 'message',
              lengths: granted,
              align,
              ...(unitSymbols === undefined ? {} : { unitSymbols }),
            };
            const setup = { ...plain, fill: { bytes } };
            const words = wordsOf(lengths);
            const places = cuts.map((cut) => cut % (sequence.symbols.length + 1));
            const got = outcome(wordFiller(setup, words), sequence, places);
            const expected = outcome(
              countingFiller(setup, streamEncoder(plain, words, undefined, 0), wordsOf(lengths)),
              sequence,
              [],
            );
            if (typeof got === 'string' || typeof expected === 'string') {
              expect(got).toBe(expected);
              return;
            }
            expect(Buffer.compare(got.bytes, expected.bytes)).toBe(0);
            expect(got.messageEndsBits).toEqual(expected.messageEndsBits);
            expect(got.symbolEnds).toEqual(expected.symbolEnds);
            expect(got.account).toEqual(expected.account);
            expect(got.payloadBits).toBe(expected.payloadBits);
          },
        ),
        { seed: 20_261_203, numRuns: Number(process.env['RUNS'] ?? 60) },
      );
    });
  }

  it('hands a sink the bytes that it would give', () => {
    const words = wordsOf(CODES['a short word and many long ones']);
    const setup: Setup = {
      policy: 'shipped',
      alphabetSize: 256,
      reset: 'message',
      lengths: 'link',
      align: 32,
      unitSymbols: 24,
      fill: { bytes: 200 },
    };
    const sequence = unitsOf(256, 5, () => 24, 400_000);
    const expected = outcome(wordFiller(setup, words), sequence, []) as Coded;
    const parts: Uint8Array[] = [];
    const sink = (bytes: Uint8Array) => void parts.push(bytes.slice());
    const got = outcome(wordFiller({ ...setup, sink }, words), sequence, []) as Coded;
    expect(parts.length).toBeGreaterThan(2);
    expect(Buffer.compare(Buffer.concat(parts), expected.bytes)).toBe(0);
    expect(got.messageEndsBits).toEqual(expected.messageEndsBits);
  });
});
