/** P. Elias, IEEE Trans. Inf. Theory 21(2), 1975: the code δ. A count v is the word of v + 1. */
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { countBits, readCount, writeCount } from '../../src/bits/elias-delta.ts';
import vectors from './vectors/elias-1975.json' with { type: 'json' };

describe('Elias delta', () => {
  it('covers 1 to 64 and more', () => {
    expect(vectors.cases.length).toBeGreaterThan(64);
  });

  it.each(vectors.cases.map(({ n, delta }) => [n, delta] as const))('of %d is %s', (n, delta) => {
    const writer = new BitWriter();
    expect(writeCount(writer, n - 1)).toBe(delta.length);
    expect(countBits(n - 1)).toBe(delta.length);
    const { bytes, bitLength } = writer.finish();
    const text = Array.from(bytes, (byte) => byte.toString(2).padStart(8, '0')).join('');
    expect(text.slice(0, bitLength)).toBe(delta);
    expect(readCount(new BitReader(bytes))).toBe(n - 1);
  });
});
