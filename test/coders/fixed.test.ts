import { describe, expect, it } from 'vitest';
import { fixed, symbolWidth } from '../../src/coders/fixed.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';
import { encode } from '../conformance/cells.ts';
import { conformance } from '../conformance/kit.ts';

conformance('fixed', { alphabetSizes: [1, 2, 3, 200, 256, 65536, 65537] });

describe('fixed', () => {
  it('takes ⌈log2 m⌉ bits a symbol', () => {
    const widths: [number, number][] = [
      [1, 0],
      [2, 1],
      [3, 2],
      [4, 2],
      [5, 3],
      [255, 8],
      [256, 8],
      [257, 9],
      [65536, 16],
      [65537, 17],
      [2 ** 32, 32],
    ];
    for (const [m, width] of widths) expect(symbolWidth(m)).toBe(width);
  });

  it('writes each symbol as itself, below and above the alphabets of the kernel', () => {
    for (const [alphabetSize, width] of [
      [5, 3],
      [65536, 16],
      [100_000, 17],
    ]) {
      const values = [0, 3, 4, 1, alphabetSize - 1];
      const symbols = alphabetSize === 5 ? Uint8Array.from(values) : Uint32Array.from(values);
      const { bytes } = encode(
        fixed.create({}),
        { policy: 'none', alphabetSize, reset: 'message', lengths: 'known', align: 1 },
        [oneMessage(symbols, alphabetSize)],
      );
      const text = Array.from(bytes, (byte) => byte.toString(2).padStart(8, '0')).join('');
      const expected = values.map((value) => value.toString(2).padStart(width, '0')).join('');
      expect(text.slice(0, expected.length)).toBe(expected);
    }
  });
});
