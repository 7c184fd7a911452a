/** The worked example of I. H. Witten, R. M. Neal, J. G. Cleary, CACM 30(6), 1987, first section (Table I, Fig. 1). */
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { Meter } from '../../src/stages/meter.ts';
import { RangeDecoder } from '../../src/stages/range-decoder.ts';
import { RangeEncoder } from '../../src/stages/range-encoder.ts';
import type { RangeBits } from '../../src/stages/range-precision.ts';
import vectors from './vectors/wnc-1987.json' with { type: 'json' };

const { alphabet, p, message, steps, ideal_bits } = vectors.cases[0];
const frequencies = p.map((probability) => Math.round(10 * probability));
const lows = frequencies.map((_, i) => frequencies.slice(0, i).reduce((a, b) => a + b, 0));
const symbols = [...message].map((letter) => alphabet.indexOf(letter));

/** The bits of a code string as a fraction of 1. */
function fractionOf(bytes: Uint8Array): number {
  return bytes.reduce((sum, byte, i) => sum + byte / 256 ** (i + 1), 0);
}

describe.each([32, 48] as RangeBits[])('eaii! with a range of %i bits', (bits) => {
  it('narrows to the intervals of the paper, step by step', () => {
    steps.forEach(([, low, high], count) => {
      const writer = new BitWriter();
      const encoder = new RangeEncoder(writer, bits);
      encoder.begin();
      for (const symbol of symbols.slice(0, count + 1)) {
        encoder.put(lows[symbol], frequencies[symbol], 10);
      }
      // Bytes shifted out, then the interval that is left, as parts of the initial one.
      const { shifted, low: rest, range } = encoder.state();
      const scale = 2 ** bits * 256 ** shifted.length;
      const start = fractionOf(shifted) + rest / scale;
      // Five roundings down of the range, each by less than total / range of it.
      const tolerance = 5 * 10 * 2 ** -(bits - 8);
      expect(Math.abs(start - Number(low))).toBeLessThan(tolerance);
      expect(Math.abs(start + range / scale - Number(high))).toBeLessThan(tolerance);
    });
  });

  it('codes the message within the bounds of its endings', () => {
    for (const [continuation, least, most] of [
      ['zeros', -8, 1],
      ['any', 0, 2],
    ] as const) {
      const writer = new BitWriter();
      const encoder = new RangeEncoder(writer, bits);
      encoder.begin();
      for (const symbol of symbols) encoder.put(lows[symbol], frequencies[symbol], 10);
      encoder.end(continuation);
      expect(Math.abs(encoder.payloadBits - ideal_bits)).toBeLessThan(1e-4);
      const over = encoder.writtenBits + encoder.endingBits - encoder.payloadBits;
      expect(over).toBeGreaterThanOrEqual(least);
      expect(over).toBeLessThan(most);
      const { bytes, bitLength } = writer.finish();
      const reader = new BitReader(bytes);
      reader.setLimit(bitLength);
      const decoder = new RangeDecoder(reader, bits);
      decoder.begin();
      const decoded = symbols.map(() => {
        const target = decoder.target(10);
        const symbol = lows.findLastIndex((low) => low <= target);
        decoder.take(lows[symbol], frequencies[symbol]);
        return alphabet[symbol];
      });
      expect(decoded.join('')).toBe(message);
      expect(decoder.end(continuation)).toBe(bitLength);
    }
  });

  it('has the ideal code length of the paper', () => {
    const meter = new Meter();
    for (const symbol of symbols) meter.put(lows[symbol], frequencies[symbol], 10);
    expect(meter.takeBits()).toBeCloseTo(ideal_bits, 10);
  });
});
