import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Setup } from '../../src/coders/contract.ts';
import { parseRecordField } from '../../src/symbols/record.ts';

/** Two fields of a byte: tokens 16 + 2 · 4 = 24 a table. */
const record = {
  bytes: 2,
  fields: [parseRecordField('a', 'u8@0', 2), parseRecordField('b', 'u8@1', 2)],
} as NonNullable<Setup['record']>;

const setup: Setup = {
  policy: 'shipped',
  alphabetSize: 256,
  reset: 'message',
  lengths: 'link',
  align: 8,
  record,
};

function costsOf(map: string, policy: Setup['policy']) {
  const coder = parseCandidate(`fields:map=${map},range=32`).create();
  const own = { ...setup, policy };
  const sequence = {
    alphabetSize: 256,
    symbols: Uint8Array.of(1, 2, 3, 4),
    messageEnds: Uint32Array.of(4),
  };
  if (policy === 'learned') return coder.costs!(own, 50, sequence)!;
  const trainer = coder.trainer!(own);
  trainer.push(sequence);
  return coder.costs!({ ...own, tables: trainer.finish() }, 50, sequence)!;
}

describe('costs of fields', () => {
  it('are those of the layout', () => {
    const { encoder, decoder } = costsOf('a:delta+b:delta', 'shipped');
    // A part without context has 2 tables: 4 tables, 96 slots of 2 bytes. First slots 5 · 1. A part: width 1, place in 16
    // bits 1, transform 1, part asked 1, first table 1, reference 1.
    expect(decoder.flashBytes).toBe(192 + 5 + 2 * 6);
    // Stage 4 + 4 + 4, five integers of 4 bytes a part, records before 1, four frames of 32.
    expect(decoder.ramBytes).toBe(12 + 40 + 1 + 128);
    expect(encoder).toMatchObject({
      flashBytes: decoder.flashBytes,
      ramBytes: decoder.ramBytes + 50,
    });
  });

  it('add the bounds of a context that asks the last value', () => {
    // 8 + 1 tables for b: 11 tables, 264 slots, first slots of 2 bytes; 7 bounds to 256 of 2 bytes.
    const { decoder } = costsOf('a:delta+b:delta/value', 'shipped');
    expect(decoder.flashBytes).toBe(528 + 12 * 2 + 2 * 6 + 14);
  });

  it('add weights, inputs and what a first value is coded beside', () => {
    // 11 tables as above. A part says beside which it begins: 1 byte more. Bounds of a: 7 of 2 bytes. b: number of inputs 1,
    // its input 1, 8 classes of 2 + 2 weights of 2 bytes.
    const { decoder } = costsOf('a:delta+b:linear:a/at:a/first:a', 'shipped');
    expect(decoder.flashBytes).toBe(528 + 12 * 2 + 2 * 7 + 14 + 1 + 1 + 8 * 4 * 2);
  });

  it('move counts to RAM where they adapt', () => {
    const plan = 5 + 2 * 6;
    const counts = 2 * (96 + 4);
    const learned = costsOf('a:delta+b:delta', 'learned').decoder;
    expect(learned).toMatchObject({ flashBytes: plan, ramBytes: 12 + 40 + 1 + 128 + counts });
    const primed = costsOf('a:delta+b:delta', 'primed').decoder;
    expect(primed).toMatchObject({ flashBytes: plan + counts, ramBytes: learned.ramBytes });
  });
});
