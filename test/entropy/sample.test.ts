import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { sampleEvenly } from '../../src/entropy/sample.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';

describe('sampleEvenly', () => {
  it('leaves what is short enough as it is', () => {
    const sequence = oneMessage(new Uint8Array(100), 2);
    expect(sampleEvenly(sequence, 100)).toBe(sequence);
    expect(sampleEvenly(sequence, 99)).not.toBe(sequence);
  });

  it('takes pieces of what lies there, in order, and ends messages where they end', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 3000 }),
        fc.integer({ min: 1, max: 1000 }),
        fc.array(fc.nat({ max: 3000 }), { maxLength: 20 }),
        (length, most, cuts) => {
          // Each symbol says where it stood.
          const symbols = Uint16Array.from({ length }, (_, i) => i);
          const ends = [...cuts.filter((c) => c < length).sort((a, b) => a - b), length];
          const sequence = {
            alphabetSize: 3000,
            symbols,
            messageEnds: Uint32Array.from(ends),
          };
          const sample = sampleEvenly(sequence, most);
          const kept = [...sample.symbols];
          expect(kept.length).toBeLessThanOrEqual(Math.max(most, 1));
          expect(kept.length).toBeGreaterThan(0);
          expect(sample.messageEnds.at(-1)).toBe(kept.length);
          const inSample = new Set(sample.messageEnds);
          kept.forEach((place, i) => {
            if (i === 0) return;
            expect(place).toBeGreaterThan(kept[i - 1] - 1);
            // Between symbols that were not neighbours, and where a message ended, a message ends.
            const broken = place !== kept[i - 1] + 1 || ends.includes(place);
            if (broken) expect(inSample.has(i)).toBe(true);
          });
        },
      ),
    );
  });

  it('begins at the start and ends at the end', () => {
    const symbols = Uint16Array.from({ length: 10_000 }, (_, i) => i);
    const sample = sampleEvenly(oneMessage(symbols, 10_000), 640);
    expect(sample.symbols[0]).toBe(0);
    expect(sample.symbols.at(-1)).toBe(9999);
    expect(sample.messageEnds).toHaveLength(64);
  });
});
