import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { CorruptStreamError, InputError } from '../../src/errors/errors.ts';
import { oneSegment } from '../../src/symbols/segments.ts';
import { parseSymbolTaker } from '../../src/symbols/takers/registry.ts';
import { checkUtf8, compareByCodePoint } from '../../src/symbols/utf8.ts';

const taker = parseSymbolTaker('codepoints');

function codePointsOf(bytes: Uint8Array, segments = oneSegment(bytes.length)): number[] {
  const { values } = taker.take({ file: 'text', bytes, segments });
  if (values.kind !== 'code-points') throw new Error(values.kind);
  return Array.from(values.codePoints);
}

/** Well-formed text: fast-check's full unicode strings without lone surrogates. */
const text = fc.string({ unit: 'binary' }).filter((t) => t.isWellFormed());

describe('codepoints', () => {
  // RFC 3629 (Yergeau 2003), section 7.
  test.each([
    ['41 e2 89 a2 ce 91 2e', [0x41, 0x2262, 0x391, 0x2e]],
    ['ed 95 9c ea b5 ad ec 96 b4', [0xd55c, 0xad6d, 0xc5b4]],
    ['e6 97 a5 e6 9c ac e8 aa 9e', [0x65e5, 0x672c, 0x8a9e]],
    ['ef bb bf f0 a3 8e b4', [0xfeff, 0x233b4]],
  ])('%s', (hex, expected) => {
    expect(codePointsOf(Buffer.from(hex.replaceAll(' ', ''), 'hex'))).toEqual(expected);
  });

  test('agree with the platform on text, and untake gives the bytes back', () => {
    fc.assert(
      fc.property(text, (t) => {
        const bytes = new TextEncoder().encode(t);
        const found = codePointsOf(bytes);
        expect(found).toEqual(Array.from(t, (c) => c.codePointAt(0)));
        expect(taker.untake?.(Uint32Array.from(found))).toEqual(bytes);
        const values = Uint32Array.from(new Set(found)).sort();
        const ids = Uint32Array.from(found, (c) => values.indexOf(c));
        expect(taker.untake?.(ids, { kind: 'code-points', values })).toEqual(bytes);
      }),
    );
  });

  // Reference for what is well-formed: the platform's TextDecoder in its fatal mode.
  test('refuse exactly the bytes that are not UTF-8', () => {
    const decoder = new TextDecoder('utf-8', { fatal: true, ignoreBOM: true });
    const nearlyUtf8 = fc.tuple(text, fc.nat(), fc.nat(255)).map(([t, at, value]) => {
      const bytes = new TextEncoder().encode(t);
      if (bytes.length > 0) bytes[at % bytes.length] = value;
      return bytes;
    });
    const arbitrary = fc.oneof(
      nearlyUtf8,
      fc.uint8Array({ maxLength: 6 }),
      fc
        .array(
          fc.constantFrom(
            0xe0,
            0xed,
            0xf0,
            0xf4,
            0x80,
            0x8f,
            0x90,
            0x9f,
            0xa0,
            0xbf,
            0xc0,
            0xc1,
            0xf5,
          ),
        )
        .map((b) => Uint8Array.from(b)),
    );
    fc.assert(
      fc.property(arbitrary, (bytes) => {
        let expected: string | undefined;
        try {
          expected = decoder.decode(bytes);
        } catch {
          expected = undefined;
        }
        if (expected === undefined) {
          expect(() => codePointsOf(bytes)).toThrow(InputError);
          expect(() => checkUtf8(bytes, 0, bytes.length, 'text')).toThrow(InputError);
        } else {
          expect(String.fromCodePoint(...codePointsOf(bytes))).toBe(expected);
          checkUtf8(bytes, 0, bytes.length, 'text');
        }
      }),
      { numRuns: 500 },
    );
  });

  test('agree with the platform on every first and second byte', () => {
    const decoder = new TextDecoder('utf-8', { fatal: true, ignoreBOM: true });
    for (let first = 0x80; first < 0x100; first++) {
      for (let second = 0; second < 0x100; second++) {
        for (const rest of [[], [0x80], [0xbf, 0xbf]]) {
          const bytes = Uint8Array.of(first, second, ...rest);
          let expected: string | undefined;
          try {
            expected = decoder.decode(bytes);
          } catch {
            expected = undefined;
          }
          let found: string | undefined;
          try {
            found = String.fromCodePoint(...codePointsOf(bytes));
          } catch (error) {
            if (!(error instanceof InputError)) throw error;
          }
          if (found !== expected) expect.fail(`${bytes}: ${found} instead of ${expected}`);
        }
      }
    }
  });

  test('say at which byte the text breaks', () => {
    const bytes = Buffer.from('61c3a9ff62', 'hex');
    expect(() => codePointsOf(bytes)).toThrow(
      expect.objectContaining({
        where: expect.objectContaining({ byteOffset: 3, got: 'the bytes ff 62' }),
      }),
    );
  });

  test('do not reach over the end of a message', () => {
    const bytes = Buffer.from('c3a9', 'hex');
    const segments = { starts: Uint32Array.of(0, 1), ends: Uint32Array.of(1, 2) };
    expect(() => codePointsOf(bytes, segments)).toThrow(
      expect.objectContaining({ where: expect.objectContaining({ byteOffset: 0 }) }),
    );
  });

  test('untake refuses symbols without a code point', () => {
    expect(() => taker.untake?.(Uint32Array.of(0xd800))).toThrow(CorruptStreamError);
    expect(() => taker.untake?.(Uint32Array.of(0x110000))).toThrow(CorruptStreamError);
    const map = { kind: 'code-points', values: Uint32Array.of(97) } as const;
    expect(() => taker.untake?.(Uint8Array.of(0, 1), map)).toThrow(CorruptStreamError);
  });
});

describe('compareByCodePoint', () => {
  // Reference: the order of UTF-8 bytes, which is that of code points (RFC 3629, section 1).
  test('is the order of the UTF-8 bytes', () => {
    fc.assert(
      fc.property(text, text, (a, b) => {
        const expected = Buffer.compare(Buffer.from(a), Buffer.from(b));
        expect(Math.sign(compareByCodePoint(a, b))).toBe(expected);
      }),
    );
    expect(compareByCodePoint('\u{1f600}', '\uffee')).toBeGreaterThan(0);
    expect(compareByCodePoint('\u{1f600}', '\u{1f601}')).toBeLessThan(0);
  });
});
