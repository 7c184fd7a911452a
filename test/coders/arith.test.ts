import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { beforeAll, describe, expect, it } from 'vitest';
import { ensureDatasets } from '../../scripts/datasets.mjs';
import { arith } from '../../src/coders/arith.ts';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Coded, Setup } from '../../src/coders/contract.ts';
import { CorruptStreamError, InputError, LimitError } from '../../src/errors/errors.ts';
import { oneMessage, type SymbolSequence, sliceMessages } from '../../src/symbols/sequence.ts';

const base: Setup = {
  policy: 'learned',
  alphabetSize: 256,
  reset: 'never',
  lengths: 'link',
  align: 8,
};

const coderOf = (text: string) => parseCandidate(`arith:${text}`).create();

function encode(text: string, sequence: SymbolSequence, setup: Setup): Coded {
  const encoder = coderOf(text).encoder(setup);
  encoder.push(sequence);
  return encoder.finish();
}

/** The setup with tables from `sequence`, where its policy has any. */
function trained(text: string, sequence: SymbolSequence, setup: Setup): Setup {
  const trainer = coderOf(text).trainer!(setup);
  trainer.push(sequence);
  return { ...setup, tables: trainer.finish() };
}

/** Seeded: 1 with probability 1/1000, else 0. */
function rareOnes(length: number): Uint8Array {
  const symbols = new Uint8Array(length);
  let state = 1;
  for (let i = 0; i < length; i++) {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    symbols[i] = state < 2 ** 32 / 1000 ? 1 : 0;
  }
  return symbols;
}

function cut(symbols: Uint8Array, size: number, alphabetSize = 256): SymbolSequence {
  const count = Math.ceil(symbols.length / size);
  const messageEnds = Uint32Array.from({ length: count }, (_, i) =>
    Math.min(symbols.length, (i + 1) * size),
  );
  return { alphabetSize, symbols, messageEnds };
}

let text: Uint8Array;
beforeAll(async () => {
  text = new Uint8Array(readFileSync(join(await ensureDatasets(), 'moby.txt')));
});

describe('payload against ideal', () => {
  const sources: [string, () => SymbolSequence][] = [
    ['text', () => oneMessage(text, 256)],
    ['constant data, 2^22 symbols', () => oneMessage(new Uint8Array(2 ** 22).fill(65), 256)],
    ['one in a thousand', () => oneMessage(rareOnes(2 ** 21), 2)],
  ];

  it.each(sources)('at 48 bits is within 6 bits in a million symbols: %s', (_, source) => {
    const sequence = source();
    const setup = { ...base, alphabetSize: sequence.alphabetSize };
    for (const candidate of ['order=0', 'order=2', 'order=1,backoff=none']) {
      const { payloadBits } = encode(candidate, sequence, setup);
      const { idealBits } = coderOf(candidate).price!(sequence, setup);
      // The constant is the error of the meter's own doubles.
      expect(payloadBits - idealBits).toBeGreaterThanOrEqual(-1e-6);
      expect(payloadBits - idealBits).toBeLessThanOrEqual((6 * sequence.symbols.length) / 1e6);
    }
  });

  it.each(sources.slice(0, 1))('at 32 bits is within 1.61 · n · T / 2^24: %s', (_, source) => {
    const sequence = source();
    const n = sequence.symbols.length;
    for (const halveAt of [2 ** 12, 2 ** 16]) {
      const candidate = `order=0,backoff=none,range=32,halve_at=${halveAt}`;
      const { payloadBits } = encode(candidate, sequence, base);
      const { idealBits } = coderOf(candidate).price!(sequence, base);
      expect(payloadBits - idealBits).toBeLessThanOrEqual((1.61 * n * halveAt) / 2 ** 24);
      expect(payloadBits - idealBits).toBeGreaterThanOrEqual(0);
    }
  });

  it('of static tables counts quantisation as payload, never as ideal', () => {
    const sequence = oneMessage(text, 256);
    for (const policy of ['sent', 'shipped'] as const) {
      const setup = trained('order=1', sequence, { ...base, policy });
      const { payloadBits } = encode('order=1', sequence, setup);
      const price = coderOf('order=1').price!(sequence, setup);
      expect(payloadBits).toBeGreaterThan(price.idealBits);
      expect(payloadBits / price.idealBits).toBeLessThan(1.001);
      if (policy === 'sent') expect(price.idealBits).toBeCloseTo(price.fit!.bits, 3);
    }
  });
});

describe('messages', () => {
  it('end within −8 to 1 bits of the payload where the end is carried, 0 to 2 where not', () => {
    const sequence = cut(text.subarray(0, 20_000), 32);
    for (const lengths of ['link', 'known', 'sent'] as const) {
      for (const candidate of ['order=1', 'order=1,range=32']) {
        const coded = encode(candidate, sequence, { ...base, reset: 'message', lengths });
        const { writtenBits, endingBits } = coded.account;
        const each = (writtenBits + endingBits - coded.payloadBits) / sequence.messageEnds.length;
        expect(each).toBeGreaterThanOrEqual(lengths === 'link' ? -8 : 0);
        expect(each).toBeLessThan(lengths === 'link' ? 1 : 2);
      }
    }
  });

  it('of a primed coder start from the trained state each time', () => {
    const setup = { ...base, policy: 'primed', reset: 'message' } as const;
    const ready = trained('order=2', cut(text.subarray(0, 50_000), 64), setup);
    const sequence = cut(text.subarray(60_000, 64_000), 50);
    const whole = encode('order=2', sequence, ready);
    const count = sequence.messageEnds.length;
    let from = 0;
    for (let i = 0; i < count; i++) {
      const alone = encode('order=2', sliceMessages(sequence, i, i + 1), ready);
      const end = whole.messageEndsBits[i];
      expect(Buffer.compare(whole.bytes.subarray(from / 8, end / 8), alone.bytes)).toBe(0);
      from = end;
    }
  });

  it('of one unit run on over their ends under reset never', () => {
    const piece = text.subarray(0, 30_000);
    const candidate = 'order=2';
    const inMessages = coderOf(candidate).price!(cut(piece, 100), base).idealBits;
    const asOne = coderOf(candidate).price!(oneMessage(piece, 256), base).idealBits;
    expect(inMessages).toBeCloseTo(asOne, 6);
  });

  it('of an alphabet of one symbol take no bits but the count', () => {
    const sequence = { ...cut(new Uint8Array(1000), 100), alphabetSize: 1 };
    for (const policy of ['learned', 'sent', 'shipped', 'primed'] as const) {
      for (const lengths of ['link', 'known', 'sent'] as const) {
        const setup = trained('order=1', sequence, {
          ...base,
          policy: policy === 'learned' ? 'primed' : policy,
          alphabetSize: 1,
          lengths,
        });
        const { account, payloadBits } = encode('order=1', sequence, { ...setup, policy });
        expect(payloadBits).toBe(0);
        expect(account.writtenBits + account.endingBits + account.tableBits).toBe(0);
        // Elias delta of 101 is 5 + 6 bits (P. Elias 1975).
        expect(account.framingBits).toBe(lengths === 'known' ? 0 : 10 * 11);
      }
    }
  });
});

describe('sent tables', () => {
  it('stay below 12 bits a pair on text', () => {
    const sequence = oneMessage(text, 256);
    for (const order of [0, 1, 2]) {
      const pairs = new Set<string>();
      for (let i = 0; i < text.length; i++)
        pairs.add(text.subarray(Math.max(0, i - order), i + 1).join());
      const setup = trained(`order=${order}`, sequence, { ...base, policy: 'sent' });
      const { account } = encode(`order=${order}`, sequence, setup);
      expect(account.tableBits / pairs.size).toBeLessThan(12);
    }
  });
});

describe('what cannot work is refused with the reason', () => {
  it.each([
    ['order=1,backoff=none', { alphabetSize: 4097 }, /no use for 4097 symbols/],
    ['order=0', { alphabetSize: 65537 }, /alphabet/],
    ['order=0,total_bits=9', { policy: 'shipped' }, /total_bits/],
    ['order=0,halve_at=767', {}, /halve_at/],
    ['order=0,backoff=none,counts=add:1/1000,halve_at=2255', {}, /halve_at/],
  ])('%s', (candidate, change, message) => {
    const setup = { ...base, ...change } as Setup;
    expect(() => coderOf(candidate).check!(setup)).toThrow(InputError);
    expect(() => coderOf(candidate).check!(setup)).toThrow(message);
  });

  it.each([
    ['order=1,backoff=none', { alphabetSize: 4096 }],
    ['order=0', { alphabetSize: 65536 }],
    ['order=0', { policy: 'shipped', alphabetSize: 65536 }],
    ['order=0,total_bits=10', { policy: 'shipped' }],
    ['order=0,halve_at=768', {}],
    ['order=0,backoff=none,counts=add:1/1000,halve_at=2256', {}],
  ])('%s is taken', (candidate, change) => {
    coderOf(candidate).check!({ ...base, ...change } as Setup);
  });

  it('counts without backoff=none', () => {
    expect(() => coderOf('order=1,counts=laplace')).toThrow(/counts=/);
    expect(() => parseCandidate('arith')).toThrow(InputError);
    expect(arith.declaration.parameters.map((p) => p.key)).toContain('order');
  });
});

describe('damaged streams', () => {
  it('decode to something or are refused, at every policy', () => {
    const sequence = cut(text.subarray(1000, 1600), 60);
    const policies = ['learned', 'sent', 'shipped', 'primed'] as const;
    const resets = ['message', 'never'] as const;
    fc.assert(
      fc.property(
        fc.constantFrom(...policies),
        fc.constantFrom(...resets),
        fc.constantFrom('link', 'sent', 'known'),
        fc.constantFrom('order=0', 'order=2', 'order=2,range=32', 'order=1,backoff=none'),
        fc.array(fc.tuple(fc.nat(500), fc.integer({ min: 1, max: 255 })), {
          minLength: 1,
          maxLength: 4,
        }),
        (policy, reset, lengths, candidate, flips) => {
          const untrained = { ...base, policy, reset, lengths } as Setup;
          const setup = policy === 'learned' ? untrained : trained(candidate, sequence, untrained);
          const coded = encode(candidate, sequence, setup);
          const bytes = coded.bytes.slice();
          for (const [at, change] of flips) bytes[at % bytes.length] ^= change;
          const ends = [0, ...sequence.messageEnds];
          try {
            const decoded = coderOf(candidate)
              .decoder(setup, { maxSymbols: 1000 })
              .decode({
                bytes,
                messageCount: sequence.messageEnds.length,
                ...(lengths === 'link' ? { messageEndsBits: coded.messageEndsBits } : {}),
                ...(lengths === 'known'
                  ? { symbolCounts: sequence.messageEnds.map((end, i) => end - ends[i]) }
                  : {}),
              });
            expect(decoded.sequence.symbols.length).toBeLessThanOrEqual(1000);
          } catch (error) {
            if (!(error instanceof CorruptStreamError || error instanceof LimitError)) throw error;
          }
        },
      ),
      { numRuns: 250, seed: 81 },
    );
  });
});
