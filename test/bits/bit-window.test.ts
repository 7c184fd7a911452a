import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWindow } from '../../src/bits/bit-window.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { CorruptStreamError } from '../../src/errors/errors.ts';

function windowOn(bytes: Uint8Array, size: number, most = 50): BitWindow {
  const read = (into: Uint8Array, at: number): number => {
    const piece = bytes.subarray(at, at + Math.min(most, into.length));
    into.set(piece);
    return piece.length;
  };
  return new BitWindow(read, bytes.length, size);
}

describe('BitWindow', () => {
  test('reads the bits that a reader of all bytes reads, wherever it slides', () => {
    fc.assert(
      fc.property(
        fc.uint8Array({ minLength: 1, maxLength: 2000 }),
        fc.array(fc.integer({ min: 0, max: 32 }), { maxLength: 600 }),
        fc.integer({ min: 64, max: 300 }),
        fc.integer({ min: 1, max: 90 }),
        (bytes, widths, size, most) => {
          const whole = new BitReader(bytes);
          const window = windowOn(bytes, size, most);
          for (const width of widths) {
            if (whole.position + width > bytes.length * 8) break;
            window.ensure(5);
            expect(window.readBits(width)).toBe(whole.readBits(width));
            expect(window.sourcePosition).toBe(whole.position);
            expect(window.bitsLeft).toBe(bytes.length * 8 - whole.position);
          }
        },
      ),
    );
  });

  test('refuses bits past the limit, also where the limit lies beyond the window', () => {
    const window = windowOn(new Uint8Array(1000), 64);
    window.setSourceLimit(7000);
    for (let i = 0; i < 7000; i += 28) {
      window.ensure(5);
      window.readBits(28);
    }
    expect(window.bitsLeft).toBe(0);
    expect(() => window.readBits(1)).toThrow(CorruptStreamError);
    window.setSourceLimit(7001);
    expect(window.readBits(1)).toBe(0);
  });

  test('brings in more where its bytes run out, and says by how much everything moved', () => {
    const bytes = Uint8Array.from({ length: 500 }, (_, i) => i % 251);
    const window = windowOn(bytes, 64);
    window.position = 60 * 8;
    const moved = window.refill(60);
    expect(moved).toBeGreaterThan(0);
    expect(window.bytes[60 - moved]).toBe(60);
    expect(window.sourcePosition).toBe(60 * 8);
    window.setSourceLimit(64 * 8);
    expect(window.refill(60 - moved)).toBe(0);
  });

  test('keeps exact positions beyond 2^32 bits', () => {
    // Byte i of a source that is nowhere stored; only what is looked at is filled in.
    const byteAt = (i: number): number => (Math.imul(i, 2654435761) >>> 13) & 255;
    const byteLength = 2 ** 30;
    const read = (into: Uint8Array, at: number): number => {
      const length = Math.min(into.length, byteLength - at);
      for (let i = Math.max(0, length - 64); i < length; i++) into[i] = byteAt(at + i);
      return length;
    };
    const window = new BitWindow(read, byteLength, 2 ** 24);
    let looks = 0;
    for (;;) {
      const last = window.limit / 8 - 40;
      window.position = last * 8 + 3;
      const at = window.sourcePosition;
      const byte = Math.floor(at / 8);
      const expected =
        byteAt(byte) * 2 ** 24 +
        byteAt(byte + 1) * 2 ** 16 +
        byteAt(byte + 2) * 256 +
        byteAt(byte + 3);
      expect(window.peekBits(29)).toBe(expected % 2 ** 29);
      looks++;
      if (window.bitsLeft < 1000) break;
      window.ensure(2 ** 16);
    }
    expect(looks).toBeGreaterThan(60);
    expect(window.sourcePosition).toBe((byteLength - 40) * 8 + 3);
  });
});

describe('a bit writer with a sink', () => {
  test('counts positions on over what is drained, and hands every byte over once', () => {
    fc.assert(
      fc.property(
        fc.array(fc.tuple(fc.integer({ min: 0, max: 32 }), fc.nat(2 ** 30), fc.boolean())),
        (writes) => {
          const parts: Uint8Array[] = [];
          const draining = new BitWriter(16, (bytes) => parts.push(bytes.slice()));
          const whole = new BitWriter();
          for (const [width, value, drains] of writes) {
            const own = width === 0 ? 0 : value % 2 ** width;
            draining.writeBits(own, width);
            whole.writeBits(own, width);
            if (drains) draining.drain();
            expect(draining.position).toBe(whole.position);
          }
          draining.padTo(32);
          whole.padTo(32);
          const { bytes, bitLength } = draining.finish();
          expect(bytes).toHaveLength(0);
          expect(bitLength).toBe(whole.position);
          expect(Buffer.concat(parts)).toEqual(Buffer.from(whole.finish().bytes));
        },
      ),
    );
  });
});
