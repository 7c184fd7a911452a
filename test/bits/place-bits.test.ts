import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { placeBits } from '../../src/bits/place-bits.ts';

const textOf = (bytes: Uint8Array) =>
  [...bytes].map((byte) => byte.toString(2).padStart(8, '0')).join('');

describe('placing bits', () => {
  it('moves them as a string of bits would, and touches nothing else', () => {
    fc.assert(
      fc.property(
        fc.uint8Array({ maxLength: 12 }),
        fc.nat(96),
        fc.nat(96),
        fc.nat(40),
        (source, a, b, at) => {
          const bits = source.length * 8;
          const [from, to] = [a % (bits + 1), b % (bits + 1)].sort((x, y) => x - y);
          const target = new Uint8Array(20);
          placeBits(source, from, to, target, at);
          const moved = textOf(source).slice(from, to);
          expect(textOf(target)).toBe(`${'0'.repeat(at)}${moved}`.padEnd(160, '0'));
        },
      ),
      { numRuns: 500 },
    );
  });

  it('leaves bits before and after as they are', () => {
    const target = Uint8Array.of(0b1100_0000, 0b0000_0011);
    placeBits(Uint8Array.of(0b1111_1111), 0, 5, target, 6);
    expect(textOf(target)).toBe('1100001111100011');
  });
});
