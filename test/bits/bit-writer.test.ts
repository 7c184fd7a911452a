import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { BugError, PromiseError } from '../../src/errors/errors.ts';

/** A number and the width it is written in. */
const field = fc.integer({ min: 0, max: 32 }).chain((width) =>
  fc.record({
    width: fc.constant(width),
    value: width === 0 ? fc.constant(0) : fc.integer({ min: 0, max: 2 ** width - 1 }),
  }),
);

function textOf(value: number, width: number): string {
  return width === 0 ? '' : value.toString(2).padStart(width, '0');
}

/** Bytes as a text of bits: the plain model that every writer test compares with. */
function bitsOf(bytes: Uint8Array): string {
  return Array.from(bytes, (byte) => textOf(byte, 8)).join('');
}

function filledUp(bits: string): string {
  return bits.padEnd(Math.ceil(bits.length / 8) * 8, '0');
}

describe('BitWriter', () => {
  it('writes fields one after another, most significant bit first', () => {
    fc.assert(
      fc.property(fc.array(field, { maxLength: 60 }), (fields) => {
        const writer = new BitWriter(1);
        let text = '';
        for (const { value, width } of fields) {
          writer.writeBits(value, width);
          text += textOf(value, width);
          expect(writer.position).toBe(text.length);
        }
        const { bytes, bitLength } = writer.finish();
        expect(bitLength).toBe(text.length);
        expect(bitsOf(bytes)).toBe(filledUp(text));
      }),
    );
  });

  it('writes runs, bytes at any bit offset, and padding', () => {
    const step = fc.oneof(
      fc.record({
        kind: fc.constant('run' as const),
        bit: fc.constantFrom(0 as const, 1 as const),
        count: fc.nat({ max: 100 }),
      }),
      fc.record({
        kind: fc.constant('bytes' as const),
        bytes: fc.uint8Array({ maxLength: 20 }),
        from: fc.nat({ max: 3 }),
      }),
      fc.record({
        kind: fc.constant('pad' as const),
        align: fc.constantFrom(1, 2, 4, 8, 16, 32, 64),
      }),
    );
    fc.assert(
      fc.property(fc.array(step, { maxLength: 30 }), (steps) => {
        const writer = new BitWriter();
        let text = '';
        for (const s of steps) {
          if (s.kind === 'run') {
            writer.writeRun(s.bit, s.count);
            text += String(s.bit).repeat(s.count);
          } else if (s.kind === 'bytes') {
            const from = Math.min(s.from, s.bytes.length);
            writer.writeBytes(s.bytes, from);
            text += bitsOf(s.bytes.subarray(from));
          } else {
            const padded = text.padEnd(Math.ceil(text.length / s.align) * s.align, '0');
            expect(writer.padTo(s.align)).toBe(padded.length - text.length);
            text = padded;
          }
          expect(writer.position).toBe(text.length);
        }
        expect(bitsOf(writer.finish().bytes)).toBe(filledUp(text));
      }),
    );
  });

  it.each([
    [2, 1],
    [-1, 8],
    [0.5, 8],
    [Number.NaN, 8],
    [2 ** 32, 32],
    [256, 8],
    [1, 0],
    [0, 33],
    [0, -1],
    [0, 1.5],
  ])('refuses the value %d in %d bits', (value, width) => {
    const writer = new BitWriter();
    expect(() => writer.writeBits(value, width)).toThrow(PromiseError);
    expect(writer.position).toBe(0);
  });

  it('takes a kernel’s state and refuses an impossible one', () => {
    const writer = new BitWriter(16);
    writer.reserve(4);
    writer.bytes[0] = 0xab;
    writer.adopt(1, 0b101, 3);
    expect(writer.position).toBe(11);
    expect(() => writer.adopt(1, 0b1000, 3)).toThrow(BugError);
    expect(() => writer.adopt(1, 0, 8)).toThrow(BugError);
    expect(() => writer.adopt(1, 0, -1)).toThrow(BugError);
    expect(() => writer.adopt(writer.bytes.length + 1, 0, 0)).toThrow(BugError);
    expect(bitsOf(writer.finish().bytes)).toBe('1010101110100000');
  });

  it('gives its bytes once', () => {
    const writer = new BitWriter();
    writer.writeBits(1, 1);
    writer.finish();
    expect(() => writer.finish()).toThrow(BugError);
    expect(() => writer.writeBits(1, 1)).toThrow(BugError);
    expect(() => writer.reserve(1)).toThrow(BugError);
  });

  it('counts exactly beyond 2^32 bits', () => {
    const writer = new BitWriter();
    // Stands for a buffer of 4 GiB, of which only the few bytes written exist.
    const sparse: Record<number, number> & { length: number } = { length: 2 ** 32 };
    writer.bytes = sparse as unknown as Uint8Array;
    writer.adopt(2 ** 31 + 3, 0b10110, 5);
    expect(writer.position).toBe(2 ** 34 + 29);
    writer.writeBits(0x12345678, 32);
    expect(writer.position).toBe(2 ** 34 + 61);
    expect(writer.padTo(64)).toBe(3);
    expect(writer.position).toBe(2 ** 34 + 64);
    const written = Array.from({ length: 5 }, (_, i) =>
      textOf(sparse[2 ** 31 + 3 + i] & 0xff, 8),
    ).join('');
    expect(written).toBe(`10110${textOf(0x12345678, 32)}000`);
  });
});
