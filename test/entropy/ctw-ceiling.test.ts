import { describe, expect, it } from 'vitest';
import { ctwCeiling, ctwDepth } from '../../src/entropy/ctw-ceiling.ts';
import { LimitError } from '../../src/errors/errors.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';

describe('ctwCeiling', () => {
  it('lies just above the rate of a chain, by the closed form', () => {
    const generator = new SeededGenerator('chain');
    let state = 0;
    const symbols = Uint8Array.from({ length: 50_000 }, () => {
      if (generator.real() < 0.1) state = 1 - state;
      return state;
    });
    const rate = -0.1 * Math.log2(0.1) - 0.9 * Math.log2(0.9);
    const { name, bitsPerSymbol } = ctwCeiling(oneMessage(symbols, 2));
    expect(name).toBe('ctw:depth=16');
    // The draw itself varies by √(n p (1 − p)) · log2 9 ÷ n = 0.0043 bits; two contexts are learned.
    expect(Math.abs(bitsPerSymbol - rate)).toBeLessThan(4 * 0.0043 + 0.002);
  });

  it.each([
    [1, 16],
    [2, 16],
    [16, 12],
    [256, 6],
    [257, 5],
    [65_536, 3],
  ])('looks back from an alphabet of %i by %i symbols', (alphabetSize, depth) => {
    expect(ctwDepth(alphabetSize)).toBe(depth);
  });

  it('costs nothing where there is nothing to tell', () => {
    expect(ctwCeiling(oneMessage(new Uint8Array(0), 2)).bitsPerSymbol).toBe(0);
    expect(ctwCeiling(oneMessage(new Uint8Array(1000), 1)).bitsPerSymbol).toBe(0);
  });

  it('refuses one symbol more than it has time for', () => {
    const most = Math.floor(2 ** 26 / (8 * 7));
    expect(() => ctwCeiling(oneMessage(new Uint8Array(most + 1), 256))).toThrow(LimitError);
  });
});
