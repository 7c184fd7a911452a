import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { CorruptStreamError, PromiseError } from '../../src/errors/errors.ts';
import { ABSENT, codeLengths } from '../../src/stages/code-lengths.ts';
import { PrefixBitCounter } from '../../src/stages/prefix-bit-counter.ts';
import { canonicalCodes, LengthTally } from '../../src/stages/prefix-code.ts';
import { PrefixDecoder } from '../../src/stages/prefix-decoder.ts';
import { PrefixEncoder } from '../../src/stages/prefix-encoder.ts';
import { newSymbolArray, type SymbolArray } from '../../src/symbols/sequence.ts';
import { integers } from '../conformance/sequences.ts';

/** A code as both kernels take it. */
interface Words {
  readonly alphabetSize: number;
  readonly symbols: Uint32Array;
  readonly lengths: Uint8Array;
  /**
   * The words as texts, by symbol; made from the definition: sorted by length, then by symbol, each
   * one more than the last.
   */
  readonly texts: Map<number, string>;
}

function wordsOf(alphabetSize: number, allLengths: Uint8Array): Words {
  const symbols = Uint32Array.from(allLengths.keys()).filter((s) => allLengths[s] !== ABSENT);
  const lengths = Uint8Array.from(symbols, (s) => allLengths[s]);
  const order = Array.from(symbols).sort((a, b) => allLengths[a] - allLengths[b] || a - b);
  const texts = new Map<number, string>();
  let code = 0n;
  let width = 0;
  for (const symbol of order) {
    if (allLengths[symbol] === 0) {
      texts.set(symbol, '');
      continue;
    }
    code <<= BigInt(allLengths[symbol] - width);
    width = allLengths[symbol];
    texts.set(symbol, code.toString(2).padStart(width, '0'));
    code += 1n;
  }
  return { alphabetSize, symbols, lengths, texts };
}

/** The code of drawn weights: flat, sparse, steep or of mixed magnitudes. */
function drawnWords(alphabetSize: number, seed: number, maxBits: number): Words {
  const next = integers(seed);
  const style = next() % 4;
  const weights = Array.from({ length: alphabetSize }, (_, i) => {
    if (style === 0) return 1 + (next() % 5);
    if (style === 1) return next() % 3 === 0 ? 1 + (next() % 1000) : 0;
    if (style === 2) return Math.max(1, Math.floor(2 ** (40 - (i % 60))));
    return 2 ** (next() % 32);
  });
  weights[next() % alphabetSize] ||= 1;
  return wordsOf(alphabetSize, codeLengths(weights, maxBits));
}

const drawn = fc
  .record({
    alphabetSize: fc.constantFrom(1, 2, 3, 40, 256, 257, 3000),
    seed: fc.nat(),
    maxBits: fc.integer({ min: 12, max: 32 }),
  })
  .map(({ alphabetSize, seed, maxBits }) => drawnWords(alphabetSize, seed, maxBits));

function message(words: Words, seed: number, length: number): SymbolArray {
  const next = integers(seed);
  const symbols = newSymbolArray(words.alphabetSize, length);
  for (let i = 0; i < length; i++) symbols[i] = words.symbols[next() % words.symbols.length];
  return symbols;
}

function encoderOf(words: Words): PrefixEncoder {
  const encoder = new PrefixEncoder(words.alphabetSize);
  encoder.setWords(words.symbols, words.lengths, words.symbols.length);
  return encoder;
}

function decoderOf(words: Words, expected: number): PrefixDecoder {
  const decoder = new PrefixDecoder(words.alphabetSize);
  decoder.setWords(words.symbols, words.lengths, words.symbols.length, expected);
  return decoder;
}

function textOf(bytes: Uint8Array, bitLength: number): string {
  const parts: string[] = [];
  for (const byte of bytes) parts.push(byte.toString(2).padStart(8, '0'));
  return parts.join('').slice(0, bitLength);
}

describe('canonical codes', () => {
  it('equal those made one by one from the definition', () => {
    fc.assert(
      fc.property(drawn, (words) => {
        const all = new Uint8Array(words.alphabetSize).fill(ABSENT);
        for (const [i, symbol] of words.symbols.entries()) all[symbol] = words.lengths[i];
        const codes = canonicalCodes(all);
        for (const [symbol, text] of words.texts) expect(codes[symbol]).toBe(Number(`0b0${text}`));
      }),
      { numRuns: 40 },
    );
  });

  it('refuse lengths that no prefix code has', () => {
    const tally = new LengthTally();
    for (const lengths of [[1, 1, 2], [0, 0, 1], [0, 1], [1, 2, 2, 32], [33], [200]])
      expect(() => tally.take(Uint8Array.from(lengths), lengths.length)).toThrow(PromiseError);
    const cases: [number[], boolean][] = [
      [[], false],
      [[0], true],
      [[1], false],
      [[1, 1], true],
      [[1, ABSENT, 2, 2], true],
      [[1, 2], false],
    ];
    for (const [lengths, complete] of cases) {
      tally.take(Uint8Array.from(lengths), lengths.length);
      expect(tally.complete).toBe(complete);
    }
  });
});

describe('the prefix kernels', () => {
  it('write the words one after another, in any pieces and from any bit on, and read them back', () => {
    fc.assert(
      fc.property(
        drawn,
        fc.nat(),
        fc.nat({ max: 3000 }),
        fc.nat({ max: 7 }),
        fc.constantFrom(1, 20, 500, Number.POSITIVE_INFINITY),
        (words, seed, length, offset, expected) => {
          const symbols = message(words, seed, length);
          const encoder = encoderOf(words);
          const writer = new BitWriter();
          writer.writeRun(1, offset);
          const cut = length === 0 ? 0 : seed % length;
          let bits = encoder.encode(writer, symbols, 0, cut);
          bits += encoder.encode(writer, symbols, cut, length);
          let text = '1'.repeat(offset);
          for (const symbol of symbols) text += words.texts.get(symbol);
          expect(bits).toBe(text.length - offset);
          const { bytes, bitLength } = writer.finish();
          expect(textOf(bytes, bitLength)).toBe(text);

          const decoder = decoderOf(words, expected);
          // Other bytes right behind must not matter, nor may their lack.
          for (const spare of [0, 9]) {
            const longer = new Uint8Array(bytes.length + spare).fill(0xa5);
            longer.set(bytes);
            const reader = new BitReader(longer);
            reader.setLimit(bitLength);
            reader.seek(offset);
            const out = newSymbolArray(words.alphabetSize, length);
            expect(decoder.decode(reader, out, 0, cut)).toBe(cut);
            expect(decoder.decode(reader, out, cut, length)).toBe(length);
            expect(reader.position).toBe(bitLength);
            expect(out).toEqual(symbols);
          }
        },
      ),
      { numRuns: 120 },
    );
  });

  it('give the same bits by pairs, in a message long enough for them', () => {
    for (const [alphabetSize, maxBits] of [
      [2, 8],
      [40, 32],
      [200, 14],
      [256, 32],
    ]) {
      const words = drawnWords(alphabetSize, 2 + 4 * alphabetSize, maxBits);
      const symbols = message(words, 77, 70_001);
      const writer = new BitWriter();
      writer.writeBits(1, 3);
      const encoder = encoderOf(words);
      encoder.encode(writer, symbols, 0, 40_001);
      encoder.encode(writer, symbols, 40_001, symbols.length);
      const { bytes, bitLength } = writer.finish();
      const parts = Array.from(symbols, (symbol) => words.texts.get(symbol));
      expect(textOf(bytes, bitLength) === `001${parts.join('')}`).toBe(true);
    }
  });

  it('carry words of 32 bits at every bit offset', () => {
    // Weights 1 1 2 4 8 …: lengths 32 32 31 … 1.
    const weights = Array.from({ length: 33 }, (_, i) => (i === 0 ? 1 : 2 ** (i - 1)));
    const words = wordsOf(33, codeLengths(weights, 32));
    expect(Math.max(...words.lengths)).toBe(32);
    for (let offset = 0; offset < 8; offset++) {
      const symbols = Uint8Array.of(0, 1, 32, 0, 2, 1, 31, 0);
      const writer = new BitWriter();
      writer.writeRun(0, offset);
      encoderOf(words).encode(writer, symbols, 0, 8);
      const { bytes, bitLength } = writer.finish();
      const text = Array.from(symbols, (symbol) => words.texts.get(symbol)).join('');
      expect(textOf(bytes, bitLength)).toBe('0'.repeat(offset) + text);
      const out = new Uint8Array(8);
      const reader = new BitReader(bytes);
      reader.seek(offset);
      decoderOf(words, 8).decode(reader, out, 0, 8);
      expect(out).toEqual(symbols);
    }
  });

  it('stop after a stop symbol, wherever it stands', () => {
    fc.assert(
      fc.property(drawn, fc.nat(), fc.nat({ max: 60 }), (words, seed, length) => {
        const symbols = message(words, seed, length);
        const writer = new BitWriter();
        encoderOf(words).encode(writer, symbols, 0, length);
        const reader = new BitReader(writer.finish().bytes);
        const stop = words.symbols[seed % words.symbols.length];
        const out = newSymbolArray(words.alphabetSize, length);
        const decoder = decoderOf(words, length);
        let at = 0;
        while (at < length) {
          const first = symbols.indexOf(stop, at);
          const expected = first < 0 ? length : first + 1;
          at = decoder.decode(reader, out, at, length, stop);
          expect(at).toBe(expected);
        }
        expect(out).toEqual(symbols);
      }),
    );
  });

  it('refuse a symbol without a word, also one whose word went with the code before', () => {
    const encoder = new PrefixEncoder(4);
    const writer = new BitWriter();
    expect(() => encoder.encode(writer, Uint8Array.of(0), 0, 1)).toThrow(PromiseError);
    encoder.setWords(Uint32Array.of(0, 1, 2), Uint8Array.of(1, 2, 2), 3);
    expect(() => encoder.encode(writer, Uint8Array.of(0, 3), 0, 2)).toThrow(PromiseError);
    encoder.setWords(Uint32Array.of(1, 3), Uint8Array.of(1, 1), 2);
    expect(encoder.lengthOf(0)).toBe(ABSENT);
    expect(() => encoder.encode(writer, Uint8Array.of(0), 0, 1)).toThrow(PromiseError);
    encoder.setWords(Uint32Array.of(2), Uint8Array.of(0), 1);
    expect(encoder.encode(writer, Uint8Array.of(2, 2, 2), 0, 3)).toBe(0);
    expect(() => encoder.encode(writer, Uint8Array.of(2, 1), 0, 2)).toThrow(PromiseError);
  });

  it('refuse a word that no symbol has, and say at which bit', () => {
    // Words 0 and 10; 11 is nobody's.
    for (const [alphabetSize, spare] of [
      [2, 0],
      [2, 20],
      [1000, 0],
      [1000, 20],
    ]) {
      const decoder = new PrefixDecoder(alphabetSize);
      decoder.setWords(Uint32Array.of(0, 1), Uint8Array.of(1, 2), 2, 10);
      const bytes = new Uint8Array(1 + spare);
      bytes[0] = 0b01001100;
      const reader = new BitReader(bytes);
      const out = newSymbolArray(alphabetSize, 30);
      expect(() => decoder.decode(reader, out, 0, 8)).toThrow(CorruptStreamError);
      reader.seek(0);
      expect(() => decoder.decode(reader, out, 0, 30)).toThrow(
        expect.objectContaining({ where: expect.objectContaining({ bitOffset: 4 }) }),
      );
    }
  });

  it('refuse to read past the limit, and say where it is', () => {
    fc.assert(
      fc.property(
        drawn,
        fc.nat(),
        fc.integer({ min: 1, max: 400 }),
        fc.nat(),
        (words, seed, length, pick) => {
          fc.pre(words.symbols.length > 1);
          const symbols = message(words, seed, length);
          const writer = new BitWriter();
          encoderOf(words).encode(writer, symbols, 0, length);
          const { bytes, bitLength } = writer.finish();
          const limit = pick % bitLength;
          const reader = new BitReader(bytes);
          reader.setLimit(limit);
          const out = newSymbolArray(words.alphabetSize, length);
          expect(() => decoderOf(words, length).decode(reader, out, 0, length)).toThrow(
            expect.objectContaining({
              name: 'CorruptStreamError',
              where: expect.objectContaining({ bitOffset: limit }),
            }),
          );
        },
      ),
    );
  });
});

describe('the bit counter', () => {
  it.each([
    [256, 0],
    [256, 1],
    [40, 1],
    [257, 0],
  ])('adds up word lengths, of %i symbols, from offset %i', (alphabetSize, offset) => {
    const lengths = codeLengths(
      Array.from({ length: alphabetSize }, (_, i) => 1 + ((i * 7919) % 1000)),
      24,
    );
    const words = wordsOf(alphabetSize, lengths);
    const symbols = message(words, 5, 40_001).subarray(offset);
    const counter = new PrefixBitCounter(encoderOf(words));
    const next = integers(offset + alphabetSize);
    for (let i = 0; i < 400; i++) {
      const from = next() % symbols.length;
      const to = Math.min(symbols.length, from + (next() % (i % 4 === 0 ? 5000 : 12)));
      let bits = 0;
      for (let j = from; j < to; j++) bits += lengths[symbols[j]];
      expect(counter.bitsOf(symbols, from, to)).toBe(bits);
    }
  });
});
