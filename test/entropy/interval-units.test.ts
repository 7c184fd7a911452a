import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { intervalUnits } from '../../src/entropy/interval-units.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

const sequenceOf = (lengths: readonly number[]): SymbolSequence => {
  let at = 0;
  const messageEnds = Uint32Array.from(lengths, (length) => {
    at += length;
    return at;
  });
  return { alphabetSize: 2, symbols: new Uint8Array(at), messageEnds };
};

const endsOf = (count: number, length: number) =>
  Uint32Array.from({ length: count }, (_, i) => (i + 1) * length);

describe('intervalUnits', () => {
  it('are files from thirty on, each taken for independent', () => {
    const sequence = sequenceOf(new Array(60).fill(5));
    const units = intervalUnits(sequence, endsOf(30, 10));
    expect(units).toMatchObject({ text: '30 files', independent: true });
    expect([...units.ends]).toEqual([...endsOf(30, 10)]);
  });

  it('are messages where files are few, and blocks of messages where those are many', () => {
    const few = intervalUnits(sequenceOf(new Array(60).fill(5)), endsOf(29, 10));
    expect(few).toMatchObject({ text: '60 messages', independent: false });
    const many = intervalUnits(sequenceOf(new Array(10_000).fill(3)));
    expect(many).toMatchObject({ text: '256 blocks of messages', independent: false });
    // Blocks end with messages.
    expect([...many.ends].every((end) => end % 3 === 0)).toBe(true);
  });

  it('are blocks of files where files are more than can be told apart', () => {
    const units = intervalUnits(sequenceOf([9000]), endsOf(900, 10));
    expect(units.text).toBe('256 blocks of files');
    expect(units.independent).toBe(false);
  });

  it('are blocks of positions where messages are few, or one holds nearly all', () => {
    expect(intervalUnits(sequenceOf([100_000])).text).toBe('256 blocks of positions');
    expect(intervalUnits(sequenceOf([10, 20, 5])).text).toBe('35 blocks of positions');
    const lengths = [...new Array(500).fill(1), 1_000_000];
    expect(intervalUnits(sequenceOf(lengths)).text).toBe('256 blocks of positions');
  });

  it('always end with the data, never fall and are at most 256', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: 0, max: 40 }), { maxLength: 700 }),
        fc.integer({ min: 1, max: 20 }),
        fc.boolean(),
        (lengths, every, withFiles) => {
          const sequence = sequenceOf(lengths);
          const { length } = sequence.symbols;
          const files = sequence.messageEnds.filter(
            (_, i) => i % every === every - 1 || i === lengths.length - 1,
          );
          const { ends } = intervalUnits(sequence, withFiles ? files : undefined);
          expect(ends.length).toBeGreaterThanOrEqual(1);
          expect(ends.length).toBeLessThanOrEqual(256);
          expect(ends[ends.length - 1]).toBe(length);
          for (let u = 1; u < ends.length; u++) expect(ends[u]).toBeGreaterThan(ends[u - 1]);
        },
      ),
    );
  });
});
