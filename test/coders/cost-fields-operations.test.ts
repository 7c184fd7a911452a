import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Setup } from '../../src/coders/contract.ts';
import { parseRecordField } from '../../src/symbols/record.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

const record = {
  bytes: 2,
  fields: [parseRecordField('a', 'u8@0', 2), parseRecordField('b', 'u8@1', 2)],
} as NonNullable<Setup['record']>;

function sequenceOf(messages: readonly (readonly number[])[]): SymbolSequence {
  let end = 0;
  return {
    alphabetSize: 256,
    symbols: Uint8Array.from(messages.flat()),
    messageEnds: Uint32Array.from(messages, (message) => (end += message.length)),
  };
}

function operations(
  map: string,
  policy: Setup['policy'],
  sequence: SymbolSequence,
  train?: SymbolSequence,
) {
  const coder = parseCandidate(`fields:map=${map}`).create();
  const setup: Setup = {
    policy,
    alphabetSize: 256,
    reset: 'message',
    lengths: 'link',
    align: 8,
    record,
  };
  if (train === undefined) return coder.operations!(sequence, setup)!;
  const trainer = coder.trainer!(setup);
  trainer.push(train);
  return coder.operations!(sequence, { ...setup, tables: trainer.finish() })!;
}

describe('operations of fields', () => {
  it('are those counted by hand for two records of zeros, learned', () => {
    const { encoder, decoder } = operations(
      'a:delta+b:delta',
      'learned',
      sequenceOf([[0, 0, 0, 0]]),
    );
    // First record, a part. Context 1 read, 1 branch; width and first or not 1, 1, what to begin beside and the reference 2, 1.
    // Token: encoder 1, 2, decoder 2, 1. Table: encoder first slot, count and total 3, one test of the sum; decoder first slot, total, count
    // walked, count 4, one test; counting 3, 1. So 11 and 7, 13 and 6. The record's end 2 and 3. Two intervals of 1 in 24: 2 branches
    // each, and a byte is shifted for both together.
    // Second: context 2, 2; width, first or not, transform 2, 2, then transform, two values, sign 4, the test for delta 1: 15 and 9,
    // 17 and 8. The end 4 and 3. Again a byte is shifted.
    expect(encoder.worst).toEqual({ multiplies: 4, divides: 2, tableReads: 34, branches: 26 });
    expect(encoder.total).toEqual({
      multiplies: 8,
      divides: 4,
      tableReads: 24 + 34,
      branches: 22 + 26,
    });
    expect(decoder.worst).toEqual({ multiplies: 4, divides: 4, tableReads: 38, branches: 24 });
    expect(decoder.total).toEqual({
      multiplies: 8,
      divides: 8,
      tableReads: 28 + 38,
      branches: 20 + 24,
    });
    expect(encoder.symbolCount).toBe(4);
  });

  it('count the places, values and weights of a linear prediction', () => {
    const train = sequenceOf([[1, 2, 3, 4]]);
    const { encoder } = operations('a:delta+b:linear:a/at:a/first:a', 'shipped', train, train);
    // First record: a 1 + 3 + 1 + 3; b 2 more for the number of a; end 2. Second: a 2 + 6 + 1 + 3; b context 2 + 1 + 4, expectation 2 +
    // 3 places + weight + 3 + 3 + weight, input 1 + 3 + 2 + 2 weights, token and table 4; end 4.
    expect(encoder.total.tableReads).toBe(8 + 10 + 2 + 12 + 32 + 4);
    // Four intervals of small values; class, own change, and two of the input.
    expect(encoder.total.multiplies).toBe(8 + 4);
    expect(encoder.total.divides).toBe(4);
  });

  it('read every count twice where a table is halved', () => {
    // The table of later records begins at 24 and passes 2^15 with its 2 047th count; every other message begins it anew.
    const zeros = (records: number) => Array.from({ length: 2 * records }, () => 0);
    const worst = (records: number) =>
      operations('a:raw+b:raw', 'learned', sequenceOf([zeros(records)])).encoder.worst.tableReads;
    // First slots of both ends of the table, and 24 counts twice; both parts in the same record.
    expect(worst(2049) - worst(2047)).toBe(2 * (2 + 48));
  });

  it.each(['shipped', 'learned', 'primed'] as const)(
    'add up over messages, which start anew, %s',
    (policy) => {
      const messages = fc.array(
        fc
          .array(fc.integer({ min: 0, max: 255 }), { minLength: 2, maxLength: 20 })
          .map((bytes) => bytes.slice(0, 2 * Math.floor(bytes.length / 2))),
        { minLength: 1, maxLength: 5 },
      );
      fc.assert(
        fc.property(messages, (all) => {
          const train = policy === 'learned' ? undefined : sequenceOf(all);
          const map = 'a:delta/last+b:delta2/field:a';
          const whole = operations(map, policy, sequenceOf(all), train);
          const alone = all.map((one) => operations(map, policy, sequenceOf([one]), train));
          for (const end of ['encoder', 'decoder'] as const) {
            for (const kind of ['multiplies', 'divides', 'tableReads', 'branches'] as const) {
              const sum = alone.reduce((total, each) => total + each[end].total[kind], 0);
              expect(whole[end].total[kind]).toBe(sum);
              expect(whole[end].worst[kind]).toBe(
                Math.max(...alone.map((each) => each[end].worst[kind])),
              );
            }
          }
          // Every interval is divided for once at the encoder, twice at the decoder.
          expect(whole.decoder.total.divides).toBe(2 * whole.encoder.total.divides);
        }),
        { numRuns: 40, seed: 13 },
      );
    },
  );
});
