import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Setup, Tables } from '../../src/coders/contract.ts';
import { staticOperations, staticTableBytes } from '../../src/coders/cost-static.ts';
import { StaticModel } from '../../src/models/static-model.ts';
import type { StaticTable } from '../../src/models/static-table.ts';
import { RangeDecoder } from '../../src/stages/range-decoder.ts';
import { RangeEncoder } from '../../src/stages/range-encoder.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

const sequenceOf = (alphabetSize: number, messages: readonly (readonly number[])[]) => {
  let end = 0;
  return {
    alphabetSize,
    symbols: Uint8Array.from(messages.flat()),
    messageEnds: Uint32Array.from(messages, (message) => (end += message.length)),
  } satisfies SymbolSequence;
};

function trained(text: string, train: SymbolSequence): { setup: Setup; table: StaticTable } {
  const base: Setup = {
    policy: 'shipped',
    alphabetSize: train.alphabetSize,
    reset: 'message',
    lengths: 'known',
    align: 8,
  };
  const trainer = parseCandidate(text).create().trainer!(base);
  trainer.push(train);
  const tables = trainer.finish();
  const { table } = tables as Tables & { table: StaticTable };
  return { setup: { ...base, tables }, table };
}

/** The table with arrays that count how often an element is read. */
function watched(table: StaticTable): { table: StaticTable; reads(): number } {
  let reads = 0;
  const watch = <T extends object>(array: T): T =>
    new Proxy(array, {
      get(target, key) {
        if (typeof key === 'string' && /^\d+$/.test(key)) reads++;
        return Reflect.get(target, key, target);
      },
    });
  const copy = Object.fromEntries(
    Object.entries(table).map(([key, value]) => [
      key,
      ArrayBuffer.isView(value) ? watch(value) : value,
    ]),
  ) as unknown as StaticTable;
  return { table: copy, reads: () => reads };
}

describe('operations of a static model', () => {
  it('are those counted by hand for two equally likely symbols', () => {
    const { setup } = trained('arith:order=0', sequenceOf(2, [[0, 1]]));
    const coder = parseCandidate('arith:order=0').create();
    const { encoder, decoder } = coder.operations!(sequenceOf(2, [[0, 1]]), setup)!;
    // A symbol. Encoder reads: total 1, two bounds, two halvings, bound and symbol found 2, frequency 1, low and frequency 2,
    // next 1. Branches: total 1, halving 2 · 2 + 1, found 2, certain 1, carry 1, shifting loop 1 (range 2^47, then 2^46).
    // Decoder reads: total 1, unseen, first entry, its frequency 3, two bounds, one halving, low and frequency 2, next and
    // symbol 2. Branches: total 1, certain, escape 2, halving 2 + 1, target 1, loop 1.
    const encoderOne = { multiplies: 2, divides: 1, tableReads: 11, branches: 11 };
    const decoderOne = { multiplies: 2, divides: 2, tableReads: 11, branches: 8 };
    const twice = (o: typeof encoderOne) =>
      Object.fromEntries(Object.entries(o).map(([kind, n]) => [kind, 2 * n]));
    expect(encoder).toEqual({ symbolCount: 2, total: twice(encoderOne), worst: encoderOne });
    expect(decoder).toEqual({ symbolCount: 2, total: twice(decoderOne), worst: decoderOne });
  });

  it('are those counted by hand for an escape', () => {
    const { setup } = trained('arith:order=0', sequenceOf(3, [[0]]));
    const coder = parseCandidate('arith:order=0').create();
    const { encoder, decoder } = coder.operations!(sequenceOf(3, [[2]]), setup)!;
    // Encoder reads: total 1, two bounds, one halving, bound 1, where the unseen begin 2. Branches: total 1, halving 2 + 1,
    // not found 1, no shorter context 1; two intervals, each carry 1 and loop 1.
    expect(encoder.total).toEqual({ multiplies: 4, divides: 2, tableReads: 7, branches: 10 });
    // Decoder reads: total 1, unseen, first entry, its frequency 3. Branches: total 1, certain, escape 2, no shorter context 1;
    // two intervals, each target 1 and loop 1.
    expect(decoder.total).toEqual({ multiplies: 4, divides: 4, tableReads: 4, branches: 8 });
  });

  it('counts a test of the loop for each byte shifted', () => {
    // A symbol seen once beside one seen often has a frequency of 1 in 2^14. The range of 32 bits, 2^32 − 1, becomes 262 143
    // (1 byte), 4 095 (2), 16 379 (2) and 65 515 (2), brought to 2^24 or more each time.
    const train = sequenceOf(2, [[...Array.from({ length: 50_000 }, () => 0), 1]]);
    const { setup } = trained('arith:order=0,range=32', train);
    const coder = parseCandidate('arith:order=0,range=32').create();
    const rare = coder.operations!(sequenceOf(2, [[1, 1, 1, 1]]), setup)!.decoder.total.branches;
    // Usual symbols shift none: 2^32 times (1 − 2^−14)^4 is far above 2^24. Both are found in one halving.
    const usual = coder.operations!(sequenceOf(2, [[0, 0, 0, 0]]), setup)!.decoder.total.branches;
    expect(rare - usual).toBe(7);
  });

  it('counts nothing of the stage where a symbol is certain', () => {
    const { setup } = trained('arith:order=0', sequenceOf(1, [[0, 0, 0]]));
    const coder = parseCandidate('arith:order=0').create();
    const { encoder, decoder } = coder.operations!(sequenceOf(1, [[0, 0]]), setup)!;
    for (const { total } of [encoder, decoder]) {
      expect(total.divides).toBe(0);
      expect(total.multiplies).toBe(0);
    }
  });

  it.each(['escape', 'add:1/2'])(
    'are what the model itself reads and asks for, unseen=%s',
    (unseen) => {
      const messages = (size: number) =>
        fc.array(fc.array(fc.integer({ min: 0, max: size - 1 }), { maxLength: 12 }), {
          maxLength: 6,
        });
      const cases = fc
        .record({ size: fc.constantFrom(1, 2, 5, 256), order: fc.integer({ min: 0, max: 2 }) })
        .chain(({ size, order }) =>
          fc.record({
            size: fc.constant(size),
            order: fc.constant(order),
            range: fc.constantFrom<32 | 48>(32, 48),
            train: messages(size),
            test: messages(size),
          }),
        );
      fc.assert(
        fc.property(cases, ({ size, order, range, train, test }) => {
          const text = `arith:order=${order},unseen=${unseen},range=${range}`;
          const { table } = trained(text, sequenceOf(size, train));
          const { encoder, decoder } = staticOperations(table, range, sequenceOf(size, test));
          const watch = watched(table);
          const model = new StaticModel(watch.table);
          const writer = new BitWriter();
          const stage = new RangeEncoder(writer, range);
          const worst = { encode: 0, decode: 0, puts: 0 };
          let puts = 0;
          let shiftedBytes = 0;
          const sink = {
            put(low: number, frequency: number, total: number) {
              puts++;
              stage.put(low, frequency, total);
            },
          };
          const ends: number[] = [];
          for (const message of test) {
            model.reset();
            stage.begin();
            for (const symbol of message) {
              const before = watch.reads();
              const putsBefore = puts;
              model.encode(Uint8Array.of(symbol), 0, 1, sink);
              worst.encode = Math.max(worst.encode, watch.reads() - before);
              worst.puts = Math.max(worst.puts, puts - putsBefore);
            }
            stage.end('any');
            shiftedBytes += stage.writtenBits / 8;
            ends.push(writer.position);
          }
          expect(encoder.total.tableReads).toBe(watch.reads());
          expect(encoder.worst.tableReads).toBe(worst.encode);
          expect(encoder.total.divides).toBe(puts);
          expect(encoder.worst.divides).toBe(worst.puts);
          // A carry and a loop test an interval, and one more for each byte; carries come on top.
          const stageBranches = 2 * puts + shiftedBytes;
          expect(encoder.total.branches).toBeGreaterThanOrEqual(stageBranches);

          const back = watched(table);
          const reading = new StaticModel(back.table);
          const reader = new BitReader(writer.finish().bytes);
          const source = new RangeDecoder(reader, range);
          let targets = 0;
          const counting = {
            target(total: number) {
              targets++;
              return source.target(total);
            },
            take: (low: number, frequency: number) => source.take(low, frequency),
          };
          test.forEach((message, i) => {
            reading.reset();
            reader.setLimit(ends[i]);
            source.begin();
            for (const symbol of message) {
              const out = new Uint8Array(1);
              const before = back.reads();
              reading.decode(counting, out, 0, 1);
              expect(out[0]).toBe(symbol);
              worst.decode = Math.max(worst.decode, back.reads() - before);
            }
            reader.seek(source.end('any'));
          });
          expect(decoder.total.tableReads).toBe(back.reads());
          expect(decoder.worst.tableReads).toBe(worst.decode);
          if (unseen === 'escape') {
            expect(encoder.total.multiplies).toBe(2 * puts);
            expect(decoder.total.multiplies).toBe(2 * targets);
            expect(decoder.total.divides).toBe(2 * targets);
          }
          const symbolCount = test.flat().length;
          for (const { total, worst: most, symbolCount: counted } of [encoder, decoder]) {
            expect(counted).toBe(symbolCount);
            for (const kind of ['multiplies', 'divides', 'tableReads', 'branches'] as const) {
              expect(most[kind] * symbolCount).toBeGreaterThanOrEqual(total[kind]);
            }
          }
          expect(staticOperations(table, range, sequenceOf(size, test))).toEqual({
            encoder,
            decoder,
          });
        }),
        { numRuns: 150, seed: 3 },
      );
    },
  );
});

describe('bytes of a static model', () => {
  it('order 0: one context, no links', () => {
    const { setup, table } = trained('arith:order=0', sequenceOf(4, [[0, 1, 2, 3]]));
    // Places 2 · 1; where the unseen begin 2; entries 4 · (symbol 1 + low 2).
    expect(staticTableBytes(table)).toBe(16);
    const costs = parseCandidate('arith:order=0').create().costs!(setup, 10, sequenceOf(4, []))!;
    // Two integers of 48 bits in 8 bytes each, a position of 4; three frames of 32; the coded message at the encoder.
    expect(costs.decoder).toMatchObject({ flashBytes: 16, ramBytes: 16 + 4 + 96 });
    expect(costs.encoder).toMatchObject({ flashBytes: 16, ramBytes: 16 + 4 + 96 + 10 });
    // With 32 bits the encoder holds one byte for a carry, however long the message is.
    const narrow = (longest: number) =>
      parseCandidate('arith:order=0,range=32').create().costs!(setup, longest, sequenceOf(4, []))!;
    expect(narrow(1000)).toEqual(narrow(10));
  });

  it('order 1: contexts empty, start, 0 and 1', () => {
    const { setup, table } = trained('arith:order=1,range=32', sequenceOf(2, [[0, 1, 0, 1]]));
    // Strings of two: start 0, 01, 10; of one: 0, 1. Places 5 · 1; contexts 4 · (shorter 1 + unseen 2); entries 5 · (1 + 2 + 1).
    expect(staticTableBytes(table)).toBe(5 + 12 + 20);
    const { decoder } = parseCandidate('arith:order=1,range=32').create().costs!(
      setup,
      10,
      sequenceOf(4, []),
    )!;
    expect(decoder.flashBytes).toBe(37);
  });

  it('unseen=add:X takes one frequency more a context', () => {
    const { table } = trained('arith:order=0,unseen=add:1', sequenceOf(4, [[0, 1, 2, 3]]));
    expect(staticTableBytes(table)).toBe(18);
  });
});
