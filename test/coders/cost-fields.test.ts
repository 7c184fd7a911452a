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

function costsOf(map: string, policy: Setup['policy'], range = 48, longest = 50) {
  const coder = parseCandidate(`fields:map=${map},range=${range}`).create();
  const own = { ...setup, policy };
  const sequence = {
    alphabetSize: 256,
    symbols: Uint8Array.of(1, 2, 3, 4),
    messageEnds: Uint32Array.of(4),
  };
  if (policy === 'learned') return coder.costs!(own, longest, sequence)!;
  const trainer = coder.trainer!(own);
  trainer.push(sequence);
  return coder.costs!({ ...own, tables: trainer.finish() }, longest, sequence)!;
}

describe('costs of fields', () => {
  // Of each part in 1 byte: place, bytes, lowest bit, width, what it is held against, what its context asks, of whom, tokens, first
  // table, reference.
  const plan = 2 * 10;

  it('are those of the layout', () => {
    const { encoder, decoder } = costsOf('a:delta+b:delta', 'shipped');
    // A part without context has 2 tables: 4 tables, 96 slots of 2 bytes.
    expect(decoder.flashBytes).toBe(192 + plan);
    // Stage 8 + 8 + 4, three integers of 4 bytes a part, records before 1, four frames of 32.
    expect(decoder.ramBytes).toBe(20 + 24 + 1 + 128);
    expect(encoder).toMatchObject({
      flashBytes: decoder.flashBytes,
      ramBytes: decoder.ramBytes + 50,
    });
  });

  it('keep no message for a carry where the range has 32 bits, as exported', () => {
    const { encoder } = costsOf('a:delta+b:delta', 'shipped', 32, 50);
    expect(encoder.flashBytes).toBe(192 + plan);
    expect(costsOf('a:delta+b:delta', 'shipped', 32, 5000).encoder).toEqual(encoder);
  });

  it('add the bounds of a context that asks the last value', () => {
    // 8 + 1 tables for b: 11 tables, 264 slots. Signs and places among the bounds, 1 byte a part; 7 bounds up to 255.
    const { decoder } = costsOf('a:delta+b:delta/value', 'shipped');
    expect(decoder.flashBytes).toBe(528 + plan + 2 * 2 + 7);
  });

  it('add weights, inputs and what a first value is coded beside', () => {
    // As above, with bounds of a. A part says beside which it begins, and where its weights begin: 2 bytes more. Where inputs
    // begin and the last ends: 3; the input 1. 8 classes of 2 + 2 weights of 2 bytes. The value before the last is kept.
    const { decoder } = costsOf('a:delta+b:linear:a/at:a/first:a', 'shipped');
    expect(decoder.flashBytes).toBe(528 + plan + 2 * 2 + 7 + 2 * 2 + 3 + 1 + 8 * 4 * 2);
    expect(decoder.ramBytes).toBe(20 + 32 + 1 + 128);
  });

  it('move counts to RAM where they adapt', () => {
    const counts = 2 * (96 + 4);
    const learned = costsOf('a:delta+b:delta', 'learned').decoder;
    expect(learned).toMatchObject({ flashBytes: plan, ramBytes: 20 + 24 + 1 + 128 + counts });
    const primed = costsOf('a:delta+b:delta', 'primed').decoder;
    expect(primed).toMatchObject({ flashBytes: plan + counts, ramBytes: learned.ramBytes });
  });
});
