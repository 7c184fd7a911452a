import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { countBits, readCount, writeCount } from '../../src/bits/elias-delta.ts';
import { CorruptStreamError, PromiseError } from '../../src/errors/errors.ts';

const MOST = Number.MAX_SAFE_INTEGER - 1;

/** Small counts, counts of every magnitude, and the neighbours of powers of two. */
const count = fc.oneof(
  fc.nat({ max: 40 }),
  fc.integer({ min: 0, max: MOST }),
  fc
    .tuple(fc.integer({ min: 1, max: 53 }), fc.integer({ min: -2, max: 1 }))
    .map(([power, by]) => Math.min(MOST, Math.max(0, 2 ** power + by))),
);

/**
 * Elias delta by its definition, as a text of bits: gamma of the length, then the number without
 * its leading 1.
 */
function deltaText(value: number): string {
  const number = (BigInt(value) + 1n).toString(2);
  const length = number.length.toString(2);
  return '0'.repeat(length.length - 1) + length + number.slice(1);
}

function textOf(bytes: Uint8Array, bitLength: number): string {
  return Array.from(bytes, (byte) => byte.toString(2).padStart(8, '0'))
    .join('')
    .slice(0, bitLength);
}

describe('counts', () => {
  it('are written as their definition says, at any bit offset, and read back', () => {
    fc.assert(
      fc.property(fc.array(count, { maxLength: 20 }), fc.nat({ max: 7 }), (values, offset) => {
        const writer = new BitWriter();
        writer.writeRun(1, offset);
        let text = '1'.repeat(offset);
        for (const value of values) {
          const bits = writeCount(writer, value);
          expect(bits).toBe(deltaText(value).length);
          expect(bits).toBe(countBits(value));
          text += deltaText(value);
        }
        const { bytes, bitLength } = writer.finish();
        expect(textOf(bytes, bitLength)).toBe(text);
        const reader = new BitReader(bytes);
        reader.setLimit(bitLength);
        reader.readBits(offset);
        for (const value of values) expect(readCount(reader)).toBe(value);
        expect(reader.position).toBe(bitLength);
      }),
      { numRuns: 300 },
    );
  });

  it.each([-1, 0.5, Number.NaN, MOST + 1, 2 ** 53, Number.POSITIVE_INFINITY])(
    'refuse %d',
    (value) => {
      expect(() => writeCount(new BitWriter(), value)).toThrow(PromiseError);
    },
  );

  it('refuse a word cut anywhere', () => {
    fc.assert(
      fc.property(count, fc.nat(), (value, pick) => {
        const writer = new BitWriter();
        const bits = writeCount(writer, value);
        const reader = new BitReader(writer.finish().bytes);
        reader.setLimit(pick % bits);
        expect(() => readCount(reader)).toThrow(CorruptStreamError);
      }),
    );
  });

  it('refuse a length that no count has: 54 to 63 bits, or more than 5 leading zeros', () => {
    for (const word of ['00000110110', '00000111111', '0000001000000', '0'.repeat(80)]) {
      const bytes = Uint8Array.from({ length: 20 }, (_, i) =>
        Number.parseInt(word.padEnd(160, '1').slice(8 * i, 8 * i + 8), 2),
      );
      expect(() => readCount(new BitReader(bytes))).toThrow(CorruptStreamError);
    }
  });

  it('of random bytes are a count or a typed error', () => {
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 20 }), (bytes) => {
        const reader = new BitReader(bytes);
        try {
          const value = readCount(reader);
          expect(Number.isSafeInteger(value) && value >= 0).toBe(true);
          expect(reader.position).toBe(countBits(value));
        } catch (error) {
          expect(error).toBeInstanceOf(CorruptStreamError);
        }
      }),
      { numRuns: 500 },
    );
  });
});
