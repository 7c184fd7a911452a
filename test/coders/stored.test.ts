import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { countBits } from '../../src/bits/elias-delta.ts';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Setup } from '../../src/coders/contract.ts';
import { CorruptStreamError, InputError } from '../../src/errors/errors.ts';
import { oneMessage, type SymbolSequence, sliceMessages } from '../../src/symbols/sequence.ts';
import { decode, encode, inputOf, unitOf } from '../conformance/cells.ts';
import { sequences } from '../conformance/sequences.ts';

const ALIGNS = [1, 8, 16, 32, 64];
const LENGTHS = ['known', 'link', 'sent'] as const;

const setupOf = (over: Partial<Setup>): Setup => ({
  policy: 'shipped',
  alphabetSize: 256,
  reset: 'message',
  lengths: 'known',
  align: 1,
  ...over,
});

const widths = new Map([
  [1, 0],
  [2, 1],
  [3, 2],
  [256, 8],
  [300, 9],
  [65_536, 16],
]);

const setups = (policies: Setup['policy'][], alphabets: number[]) =>
  fc.record({
    policy: fc.constantFrom(...policies),
    alphabetSize: fc.constantFrom(...alphabets),
    reset: fc.constant('message' as const),
    lengths: fc.constantFrom(...LENGTHS),
    align: fc.constantFrom(...ALIGNS),
  });

/** Carried bits and symbols of each message. */
function messagesOf(sequence: SymbolSequence, ends: Float64Array) {
  return [...ends].map((end, i) => ({
    carriedBits: end - (i === 0 ? 0 : ends[i - 1]),
    symbolCount: sequence.messageEnds[i] - (i === 0 ? 0 : sequence.messageEnds[i - 1]),
    message: sliceMessages(sequence, i, i + 1),
  }));
}

const CANDIDATES: [string, Setup['policy'][], number[]][] = [
  ['rice', ['shipped', 'sent', 'learned', 'primed'], [1, 3, 256, 65_536]],
  ['rice:k=0', ['none'], [1, 3, 256]],
  ['arith:order=1', ['shipped', 'learned', 'sent'], [2, 256]],
  ['huffman', ['shipped', 'sent'], [1, 300]],
];

describe.each(CANDIDATES)('stored=on of %s', (candidate, policies, alphabets) => {
  const colon = candidate.includes(':') ? ',' : ':';
  const wrapped = parseCandidate(`${candidate}${colon}stored=on`).create();
  const own = parseCandidate(candidate).create();
  const cases = setups(policies, alphabets).chain((setup) =>
    fc.tuple(fc.constant(setup as Setup), sequences(setup.alphabetSize)),
  );

  it('a message is the shorter of the coder’s bits and raw symbols, both padded; never above the bound', () => {
    fc.assert(
      fc.property(cases, ([setup, whole]) => {
        const unit = unitOf(wrapped, setup, whole);
        const coded = encode(wrapped, unit.encoderSetup, [unit.sequence]);
        const price = wrapped.price!(unit.sequence, unit.encoderSetup);
        const ownPrice = own.price!(unit.sequence, { ...unit.encoderSetup });
        let rawBits = 0;
        const kept: number[] = [];
        for (const [i, m] of messagesOf(unit.sequence, coded.messageEndsBits).entries()) {
          const opening = 1 + (setup.lengths === 'known' ? 0 : countBits(m.symbolCount));
          const raw = m.symbolCount * widths.get(setup.alphabetSize)!;
          const alone = encode(own, { ...unit.encoderSetup, lengths: 'known', align: 1 }, [
            m.message,
          ]);
          const padded = (bits: number) => Math.ceil((opening + bits) / setup.align) * setup.align;
          const ownBits = alone.messageEndsBits[0];
          expect(m.carriedBits).toBe(Math.min(padded(ownBits), padded(raw)));
          expect(m.carriedBits).toBeLessThanOrEqual(opening + raw + setup.align - 1);
          const isRaw = padded(raw) < padded(ownBits);
          if (isRaw) rawBits += raw;
          else kept.push(i);
          expect(price.messageIdealBits[i]).toBe(isRaw ? raw : ownPrice.messageIdealBits[i]);
        }
        expect(price.fit).toEqual(ownPrice.fit);

        // The account: selectors, counts, raw symbols, and of the coder's lines those of the messages that it coded.
        const { account } = coded;
        expect(account.indexBits).toBe(unit.sequence.messageEnds.length);
        const known = { ...unit.encoderSetup, lengths: 'known' as const, align: 1 };
        const parts = kept.map((i) => encode(own, known, [sliceMessages(unit.sequence, i, i + 1)]));
        for (const line of ['tableBits', 'endingBits', 'checkBits'] as const)
          expect(account[line]).toBe(parts.reduce((sum, part) => sum + part.account[line], 0));
        expect(account.writtenBits).toBe(
          parts.reduce((sum, part) => sum + part.account.writtenBits, rawBits),
        );
        expect(coded.payloadBits).toBeCloseTo(
          parts.reduce((sum, part) => sum + part.payloadBits, rawBits),
          6,
        );
      }),
      { seed: 41, numRuns: 40 },
    );
  });
});

describe('stored=on', () => {
  const noise = Uint8Array.from({ length: 64 }, (_, i) => (i * 151 + 77) % 256);

  it('keeps a message that a unary code would make enormous at its raw size', () => {
    const coder = parseCandidate('rice:k=0,stored=on').create();
    const setup = setupOf({ policy: 'none', lengths: 'link', align: 8, alphabetSize: 65_536 });
    const sequence = oneMessage(Uint16Array.of(65_535, 65_535, 65_535, 65_535), 65_536);
    const coded = encode(coder, setup, [sequence]);
    // One selector, the count 4 as δ(5) = 00101 in 5 bits, 4 · 16 raw bits, and 2 bits of padding.
    expect(coded.messageEndsBits).toEqual(Float64Array.of(72));
    expect(coded.account).toEqual({
      writtenBits: 64,
      endingBits: 0,
      paddingBits: 2,
      tableBits: 0,
      indexBits: 1,
      framingBits: 5,
      checkBits: 0,
    });
    expect(decode(coder, setup, inputOf(setup, coded, sequence), 4).sequence).toEqual(sequence);
  });

  it('is refused where a message does not decode alone', () => {
    for (const [candidate, policy] of [
      ['arith:order=0,stored=on', 'learned'],
      ['arith:order=0,stored=on', 'primed'],
      ['huffman:stored=on', 'sent'],
      ['rice:stored=on,after=delta', 'learned'],
    ] as const) {
      const { create, declaration } = parseCandidate(candidate);
      expect(declaration.resets).toEqual(['message']);
      const setup = setupOf({ policy, reset: 'never' });
      expect(() => create().check!(setup)).toThrow(/decoded alone/);
      create().check!({ ...setup, reset: 'message' });
    }
    expect(() =>
      parseCandidate('huffman:stored=on').create().check!(setupOf({ policy: 'learned' })),
    ).toThrow(InputError);
  });

  it('says its bound', () => {
    const { declaration } = parseCandidate('rice:stored=on');
    expect(declaration.worstCase).toMatch(/⌈log2 m⌉ bits and a selector of 1 bit/);
    expect(declaration.needsWholeMessage).toBe(true);
  });

  it('a raw symbol outside the alphabet and a raw message longer than its bits are refused', () => {
    const coder = parseCandidate('fixed:stored=on').create();
    const setup = setupOf({ policy: 'none', alphabetSize: 3 });
    const input = (byte: number, count: number) => ({
      bytes: Uint8Array.of(byte),
      messageCount: 1,
      symbolCounts: Uint32Array.of(count),
    });
    expect(decode(coder, setup, input(0b1_10_01_00_0, 3), 9).sequence.symbols).toEqual(
      Uint8Array.of(2, 1, 0),
    );
    expect(() => decode(coder, setup, input(0b1_10_11_00_0, 3), 9)).toThrow(/outside the alphabet/);
    expect(() => decode(coder, setup, input(0b1_10_01_00_0, 4), 9)).toThrow(CorruptStreamError);
  });

  it('tells a fault of the coder inside by its place in the whole', () => {
    const coder = parseCandidate('rice:k=1,stored=on').create();
    const setup = setupOf({ policy: 'none', lengths: 'link', align: 8 });
    const messages: SymbolSequence = {
      alphabetSize: 256,
      symbols: Uint8Array.from([...noise, 1, 0, 1, 0, 1, 0]),
      messageEnds: Uint32Array.of(64, 70),
    };
    const coded = encode(coder, setup, [messages]);
    const start = coded.messageEndsBits[0];
    const input = inputOf(setup, coded, messages);
    // Selector and count stay; the words after them become zeros without end.
    const bytes = input.bytes.slice();
    bytes.fill(0, start / 8 + 1);
    let bitOffset = 0;
    try {
      decode(coder, setup, { ...input, bytes }, 100);
    } catch (error) {
      expect(error).toBeInstanceOf(CorruptStreamError);
      bitOffset = (error as CorruptStreamError).where.bitOffset!;
    }
    expect(bitOffset).toBeGreaterThan(start);
    expect(bitOffset).toBeLessThanOrEqual(bytes.length * 8);
  });
});
