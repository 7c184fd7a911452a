import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { CorruptStreamError } from '../../src/errors/errors.ts';
import {
  type AlphabetMap,
  alphabetMapBits,
  alphabetMapSize,
  MAX_ALPHABET_SIZE,
  MAX_RANGE_VALUE,
  readAlphabetMap,
  writeAlphabetMap,
} from '../../src/symbols/alphabet-map.ts';
import { compareByCodePoint } from '../../src/symbols/utf8.ts';

const codePointMap = fc
  .uniqueArray(
    fc.integer({ min: 0, max: 0x10ffff }).filter((v) => v < 0xd800 || v > 0xdfff),
    { maxLength: 40 },
  )
  .map((values): AlphabetMap => ({ kind: 'code-points', values: Uint32Array.from(values).sort() }));
const rangeMap = fc
  .record({
    low: fc.integer({ min: -MAX_RANGE_VALUE, max: MAX_RANGE_VALUE }),
    size: fc.integer({ min: 1, max: MAX_ALPHABET_SIZE }),
  })
  .map((range): AlphabetMap => ({ kind: 'range', ...range }));
const textMap = fc
  .uniqueArray(
    fc.string({ unit: 'binary' }).filter((t) => t.isWellFormed()),
    { maxLength: 20 },
  )
  .map((values): AlphabetMap => ({ kind: 'texts', values: values.sort(compareByCodePoint) }));
const anyMap = fc.oneof(codePointMap, rangeMap, textMap);

function written(map: AlphabetMap, lead: number) {
  const writer = new BitWriter();
  writer.writeBits(0, lead);
  const bits = writeAlphabetMap(writer, map);
  const { bytes, bitLength } = writer.finish();
  expect(bitLength).toBe(lead + bits);
  return { bytes, bitLength };
}

/** Length of the Elias delta word of v + 1 from its definition: Elias 1975, |γ(|β(n)|)| + |β(n)| − 1. */
function deltaBits(v: number): number {
  const length = (n: number) => n.toString(2).length;
  const beta = length(v + 1);
  return 2 * length(beta) - 1 + beta - 1;
}

describe('alphabet maps', () => {
  test('come back as written, from any bit, and take the bits that are booked', () => {
    fc.assert(
      fc.property(anyMap, fc.nat(9), (map, lead) => {
        const { bytes, bitLength } = written(map, lead);
        const reader = new BitReader(bytes);
        reader.setLimit(bitLength);
        reader.readBits(lead);
        expect(readAlphabetMap(reader)).toEqual(map);
        expect(reader.position).toBe(bitLength);
        expect(alphabetMapBits(map)).toBe(bitLength - lead);
      }),
    );
  });

  test('cost their kind, Elias delta words and 8 bits for each byte of text', () => {
    expect(alphabetMapBits({ kind: 'code-points', values: Uint32Array.of(10, 32, 33, 8364) })).toBe(
      2 + [4, 10, 21, 0, 8330].reduce((sum, v) => sum + deltaBits(v), 0),
    );
    expect(alphabetMapBits({ kind: 'range', low: -25, size: 300 })).toBe(
      2 + deltaBits(49) + deltaBits(300),
    );
    expect(alphabetMapBits({ kind: 'texts', values: ['', 'closed', 'défaut'] })).toBe(
      2 + deltaBits(3) + deltaBits(0) + deltaBits(6) + 48 + deltaBits(7) + 56,
    );
  });

  test('have the size of their alphabet', () => {
    expect(alphabetMapSize({ kind: 'range', low: 5, size: 7 })).toBe(7);
    expect(alphabetMapSize({ kind: 'texts', values: ['a', 'b'] })).toBe(2);
  });

  test('damaged bytes give a CorruptStreamError, or by luck a map', () => {
    const damaged = fc
      .tuple(anyMap, fc.array(fc.nat(), { maxLength: 4 }), fc.nat())
      .map(([map, flips, cut]) => {
        const bytes = written(map, 0).bytes;
        for (const flip of flips) {
          const bit = flip % (bytes.length * 8);
          bytes[bit >>> 3] ^= 0x80 >>> (bit & 7);
        }
        return bytes.subarray(0, bytes.length - (cut % (bytes.length + 1)));
      });
    fc.assert(
      fc.property(fc.oneof(damaged, fc.uint8Array({ maxLength: 30 })), (bytes) => {
        let map: AlphabetMap;
        try {
          map = readAlphabetMap(new BitReader(bytes));
        } catch (error) {
          expect(error).toBeInstanceOf(CorruptStreamError);
          return;
        }
        // Whatever is accepted is a map that a writer could have meant.
        const again = written(map, 0);
        expect(readAlphabetMap(new BitReader(again.bytes))).toEqual(map);
      }),
      { numRuns: 500 },
    );
  });

  test('texts out of order, surrogates and unknown kinds are refused', () => {
    const texts = written({ kind: 'texts', values: ['b', 'a'] }, 0);
    expect(() => readAlphabetMap(new BitReader(texts.bytes))).toThrow(/do not rise/);
    const points = written({ kind: 'code-points', values: Uint32Array.of(0xd800) }, 0);
    expect(() => readAlphabetMap(new BitReader(points.bytes))).toThrow(CorruptStreamError);
    expect(() => readAlphabetMap(new BitReader(Uint8Array.of(0xff, 0xff)))).toThrow(
      /no known kind/,
    );
  });
});
