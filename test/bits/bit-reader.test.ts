import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { CorruptStreamError, PromiseError } from '../../src/errors/errors.ts';

function bitsOf(bytes: Uint8Array): string {
  return Array.from(bytes, (byte) => byte.toString(2).padStart(8, '0')).join('');
}

function numberOf(bits: string): number {
  return bits === '' ? 0 : Number.parseInt(bits, 2);
}

const bytesArbitrary = fc.uint8Array({ maxLength: 24 });

describe('BitReader', () => {
  it('reads any widths from any offset, and zeros past the limit as far as allowed', () => {
    fc.assert(
      fc.property(
        bytesArbitrary,
        fc.array(fc.integer({ min: 0, max: 32 }), { maxLength: 12 }),
        fc.nat(),
        fc.integer({ min: 0, max: 80 }),
        (bytes, widths, pick, allowed) => {
          const limit = pick % (bytes.length * 8 + 1);
          const reader = new BitReader(bytes, allowed);
          reader.setLimit(limit);
          const text = bitsOf(bytes).slice(0, limit) + '0'.repeat(400);
          let at = 0;
          for (const width of widths) {
            expect(reader.peekBits(width)).toBe(numberOf(text.slice(at, at + width)));
            expect(reader.position).toBe(at);
            if (at + width > limit + allowed) {
              expect(() => reader.readBits(width)).toThrow(CorruptStreamError);
              return;
            }
            expect(reader.readBits(width)).toBe(numberOf(text.slice(at, at + width)));
            at += width;
            expect(reader.position).toBe(at);
            expect(reader.phantomBits).toBe(Math.max(0, at - limit));
          }
        },
      ),
    );
  });

  it('reads back what a BitWriter wrote', () => {
    const field = fc
      .integer({ min: 1, max: 32 })
      .chain((width) => fc.tuple(fc.integer({ min: 0, max: 2 ** width - 1 }), fc.constant(width)));
    fc.assert(
      fc.property(fc.array(field, { maxLength: 80 }), (fields) => {
        const writer = new BitWriter();
        for (const [value, width] of fields) writer.writeBits(value, width);
        const reader = new BitReader(writer.finish().bytes);
        for (const [value, width] of fields) expect(reader.readBits(width)).toBe(value);
      }),
    );
  });

  it('says at which bit the bytes ended', () => {
    const reader = new BitReader(Uint8Array.of(0xff, 0xff));
    reader.setLimit(13);
    reader.readBits(10);
    expect(() => reader.readBits(4)).toThrow(
      expect.objectContaining({ where: expect.objectContaining({ bitOffset: 13 }) }),
    );
    expect(reader.readBits(3)).toBe(7);
  });

  it('keeps its limit within position and bytes', () => {
    const reader = new BitReader(new Uint8Array(4));
    reader.readBits(9);
    for (const limit of [8, 33, 9.5, Number.NaN, -1, Number.POSITIVE_INFINITY])
      expect(() => reader.setLimit(limit)).toThrow(CorruptStreamError);
    reader.setLimit(9);
    expect(() => reader.readBits(1)).toThrow(CorruptStreamError);
    reader.setLimit(32);
    expect(reader.readBits(23)).toBe(0);
  });

  it('moves to any bit, within limit and allowed phantom bits', () => {
    const reader = new BitReader(Uint8Array.of(0b00010000, 0b10000000), 5);
    reader.seek(21);
    expect(reader.phantomBits).toBe(5);
    expect(() => reader.seek(22)).toThrow(CorruptStreamError);
    reader.seek(3);
    expect(reader.readBits(6)).toBe(0b100001);
    expect(() => reader.seek(-1)).toThrow(PromiseError);
    expect(() => reader.seek(1.5)).toThrow(PromiseError);
    expect(() => reader.readBits(33)).toThrow(PromiseError);
    expect(() => reader.readBits(-1)).toThrow(PromiseError);
  });

  it('counts exactly beyond 2^32 bits', () => {
    // Stands for 4 GiB of bytes, of which only a few are not zero.
    const at = 2 ** 31 + 1;
    const sparse = { length: 2 ** 32, [at]: 0x12, [at + 1]: 0x34, [at + 2]: 0x56, [at + 3]: 0x78 };
    const reader = new BitReader(sparse as unknown as Uint8Array);
    expect(reader.limit).toBe(2 ** 35);
    reader.seek(8 * at + 4);
    expect(reader.peekBits(12)).toBe(0x234);
    expect(reader.readBits(28)).toBe(0x2345678);
    expect(reader.position).toBe(2 ** 34 + 40);
    reader.setLimit(2 ** 34 + 41);
    expect(reader.readBits(1)).toBe(0);
    expect(() => reader.readBits(1)).toThrow(CorruptStreamError);
  });
});
