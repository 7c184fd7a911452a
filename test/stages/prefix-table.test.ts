import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { CorruptStreamError, PromiseError } from '../../src/errors/errors.ts';
import { CodeLengthFitter } from '../../src/stages/code-lengths.ts';
import {
  readGaps,
  readSubset,
  readWithin,
  writeGaps,
  writeSubset,
  writeWithin,
} from '../../src/stages/prefix-subset.ts';
import { PrefixTable } from '../../src/stages/prefix-table.ts';
import { integers } from '../conformance/sequences.ts';

/** A sorted set within 0 … range − 1. */
interface DrawnSet {
  readonly range: number;
  readonly members: Float64Array;
}

const sets = fc
  .record({
    range: fc.oneof(
      fc.constantFrom(1, 2, 3, 256, 65536, 2 ** 32, 2 ** 53 - 1),
      fc.integer({ min: 1, max: 600 }),
    ),
    count: fc.integer({ min: 1, max: 200 }),
    seed: fc.nat(),
    clustered: fc.boolean(),
  })
  .map(({ range, count, seed, clustered }): DrawnSet => {
    const next = integers(seed);
    const members = new Set<number>();
    for (let i = 0; i < count; i++) {
      const value = clustered
        ? Math.floor(range / 3) + (next() % 60)
        : (next() * 2 ** 21 + (next() % 2 ** 21)) % range;
      if (value < range) members.add(value);
    }
    if (members.size === 0) members.add(range - 1);
    return { range, members: Float64Array.from(members).sort() };
  });

describe('sets', () => {
  it('come back from either way of writing, in as many bits as counted', () => {
    fc.assert(
      fc.property(sets, ({ range, members }) => {
        const count = members.length;
        const writer = new BitWriter();
        const first = writeSubset(writer, members, 0, count, 0, range);
        expect(writer.position).toBe(first);
        expect(writeSubset(undefined, members, 0, count, 0, range)).toBe(first);
        const second = writeGaps(writer, members, count);
        expect(writer.position).toBe(first + second);
        expect(writeGaps(undefined, members, count)).toBe(second);
        const reader = new BitReader(writer.finish().bytes);
        const back = new Float64Array(count);
        readSubset(reader, back, 0, count, 0, range);
        expect(back).toEqual(members);
        expect(reader.position).toBe(first);
        readGaps(reader, back.fill(0), count, range);
        expect(back).toEqual(members);
        expect(reader.position).toBe(first + second);
      }),
    );
  });

  it('cost nothing where all are in, and no set of a fixed size costs less than others leave free', () => {
    for (const [range, count] of [
      [5, 5],
      [6, 1],
      [7, 3],
      [9, 4],
      [10, 9],
    ]) {
      // Every set of the size: their words must keep Kraft's sum at exactly 1.
      let sum = 0;
      for (let mask = 0; mask < 2 ** range; mask++) {
        const members = Uint32Array.from({ length: range }, (_, i) => i).filter(
          (i) => (mask >>> i) & 1,
        );
        if (members.length !== count) continue;
        sum += 2 ** -writeSubset(undefined, members, 0, count, 0, range);
      }
      expect(sum).toBe(1);
    }
    expect(writeSubset(undefined, Uint32Array.of(0, 1, 2), 0, 3, 0, 3)).toBe(0);
  });

  it('of numbers within a range use every word', () => {
    for (const size of [1, 2, 3, 5, 8, 100, 257]) {
      let sum = 0;
      for (let value = 0; value < size; value++) {
        const writer = new BitWriter();
        const bits = writeWithin(writer, value, size);
        sum += 2 ** -bits;
        expect(readWithin(new BitReader(writer.finish().bytes), size)).toBe(value);
      }
      expect(sum).toBe(1);
    }
    for (const value of [0, 1, 2 ** 40, 2 ** 53 - 2]) {
      const writer = new BitWriter();
      writeWithin(writer, value, 2 ** 53 - 1);
      expect(readWithin(new BitReader(writer.finish().bytes), 2 ** 53 - 1)).toBe(value);
    }
  });
});

function fitted(members: Float64Array, seed: number, maxBits: number): PrefixTable {
  const next = integers(seed);
  const table = new PrefixTable();
  const count = members.length;
  table.reserve(count);
  table.symbols.set(members);
  table.count = count;
  const steep = next() % 2 === 0;
  const weights = Float64Array.from({ length: count }, () =>
    steep ? 2 ** (next() % 40) : 1 + (next() % 9),
  );
  new CodeLengthFitter().fit(weights, count, maxBits, table.lengths);
  return table;
}

describe('the table of a prefix code', () => {
  it('comes back, bit for bit, for every limit that its code keeps', () => {
    fc.assert(
      fc.property(sets, fc.nat(), fc.integer({ min: 8, max: 32 }), (set, seed, maxBits) => {
        const table = fitted(set.members, seed, maxBits);
        const writer = new BitWriter();
        const bits = table.write(writer, set.range, maxBits);
        const { bytes, bitLength } = writer.finish();
        expect(bits).toBe(bitLength);
        const reader = new BitReader(bytes);
        reader.setLimit(bitLength);
        const back = new PrefixTable();
        back.read(reader, set.range, maxBits, table.count);
        expect(reader.position).toBe(bitLength);
        expect(back.count).toBe(table.count);
        expect(back.symbols.slice(0, back.count)).toEqual(set.members);
        expect(back.lengths.slice(0, back.count)).toEqual(table.lengths.slice(0, table.count));
        // One symbol fewer than the table names cannot have been coded.
        expect(() =>
          new PrefixTable().read(new BitReader(bytes), set.range, maxBits, table.count - 1),
        ).toThrow(CorruptStreamError);
      }),
      { numRuns: 200 },
    );
  });

  it('costs no bits for what is implied', () => {
    const table = new PrefixTable();
    // Both of two symbols: the count, 2 − 1 written as Elias delta of 2, and nothing else.
    table.symbols.set([0, 1]);
    table.lengths.set([1, 1]);
    table.count = 2;
    expect(table.write(new BitWriter(), 2, 24)).toBe(4);
    // The only symbol of its alphabet: the count alone.
    table.lengths[0] = 0;
    table.count = 1;
    expect(table.write(new BitWriter(), 1, 24)).toBe(1);
    // At the least limit all lengths are equal, and implied.
    table.reserve(16);
    for (let i = 0; i < 16; i++) {
      table.symbols[i] = i;
      table.lengths[i] = 4;
    }
    table.count = 16;
    expect(table.write(new BitWriter(), 16, 4)).toBe(9);
  });

  it('is small for a short message', () => {
    // 20 symbols of text; the bound is the project's own aim, not a law.
    const text = 'set point 4.5 degree';
    const counts = new Map<number, number>();
    for (const char of text) {
      const symbol = char.charCodeAt(0);
      counts.set(symbol, (counts.get(symbol) ?? 0) + 1);
    }
    const table = new PrefixTable();
    const symbols = [...counts.keys()].sort((a, b) => a - b);
    table.symbols.set(symbols);
    table.count = symbols.length;
    const weights = Float64Array.from(symbols, (symbol) => counts.get(symbol)!);
    new CodeLengthFitter().fit(weights, symbols.length, 24, table.lengths);
    expect(text.length).toBe(20);
    expect(table.write(new BitWriter(), 256, 24)).toBeLessThan(100);
  });

  it('of an incomplete code or of none is refused', () => {
    const table = new PrefixTable();
    expect(() => table.write(new BitWriter(), 256, 24)).toThrow(PromiseError);
    table.symbols.set([3, 4]);
    table.lengths.set([1, 2]);
    table.count = 2;
    expect(() => table.write(new BitWriter(), 256, 24)).toThrow(PromiseError);
  });

  it('read from any bytes is a complete code or a typed error', () => {
    const table = new PrefixTable();
    fc.assert(
      fc.property(
        fc.uint8Array({ maxLength: 60 }),
        fc.constantFrom(1, 2, 5, 256, 65536, 2 ** 48),
        fc.integer({ min: 1, max: 32 }),
        (bytes, range, maxBits) => {
          try {
            table.read(new BitReader(bytes), range, maxBits, 5000);
          } catch (error) {
            expect(error).toBeInstanceOf(CorruptStreamError);
            return;
          }
          let kraft = 0;
          let before = -1;
          for (let i = 0; i < table.count; i++) {
            kraft += 2 ** -table.lengths[i];
            expect(table.lengths[i]).toBeLessThanOrEqual(maxBits);
            expect(table.symbols[i]).toBeGreaterThan(before);
            before = table.symbols[i];
          }
          expect(before).toBeLessThan(range);
          expect(kraft).toBe(1);
        },
      ),
      { numRuns: 2000 },
    );
  });

  it('cut anywhere is a typed error', () => {
    fc.assert(
      fc.property(sets, fc.nat(), fc.nat(), (set, seed, pick) => {
        const writer = new BitWriter();
        const bits = fitted(set.members, seed, 24).write(writer, set.range, 24);
        const reader = new BitReader(writer.finish().bytes);
        reader.setLimit(pick % bits);
        expect(() => new PrefixTable().read(reader, set.range, 24, 1000)).toThrow(
          CorruptStreamError,
        );
      }),
    );
  });
});
