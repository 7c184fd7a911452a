import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Coded, Coder, Setup } from '../../src/coders/contract.ts';
import type { CodedSource } from '../../src/coders/in-pieces.ts';
import { symbolCountsOf, trainOn } from '../../src/coders/verify.ts';
import { CorruptStreamError, LimitError } from '../../src/errors/errors.ts';
import type { SymbolChunk, SymbolSequence } from '../../src/symbols/sequence.ts';
import { newSymbolArray } from '../../src/symbols/sequence.ts';

/** Cuts a sequence into chunks of so many symbols, in buffers that are overwritten once used, as a reader of files does. */
function* chunksOf(sequence: SymbolSequence, size: number): Generator<SymbolChunk> {
  const { alphabetSize, symbols, messageEnds } = sequence;
  const buffer = newSymbolArray(alphabetSize, size);
  let message = 0;
  for (let from = 0; from < symbols.length || message < messageEnds.length; from += size) {
    const to = Math.min(symbols.length, from + size);
    buffer.fill(0).set(symbols.subarray(from, to));
    const ends: number[] = [];
    while (message < messageEnds.length && messageEnds[message] <= to)
      ends.push(messageEnds[message++] - from);
    const closed = ends.at(-1) ?? 0;
    const start = message === 0 ? 0 : messageEnds[message - 1];
    yield {
      alphabetSize,
      symbols: buffer.subarray(0, to - from),
      messageEnds: Uint32Array.from(ends),
      ...(closed < to - from ? { openSymbolCount: messageEnds[message] - start } : {}),
    };
  }
}

interface Case {
  readonly sequence: SymbolSequence;
  readonly setup: Setup;
  readonly coder: Coder;
}

const POLICIES = [
  { policy: 'sent', reset: 'never' },
  { policy: 'sent', reset: 'message' },
  { policy: 'shipped', reset: 'message' },
  { policy: 'learned', reset: 'never' },
  { policy: 'learned', reset: 'message' },
  { policy: 'primed', reset: 'message' },
  { policy: 'primed', reset: 'never' },
] as const;

const CANDIDATES = [
  'huffman',
  'huffman:maxbits=16',
  'arith:order=0',
  'arith:order=1',
  'arith:order=2',
  'arith:order=1,backoff=none',
  'arith:order=1,range=32',
  'arith:order=1,position=3',
];

/** Sequences with runs, rare symbols and messages of all lengths, empty ones too. */
const sequences = fc
  .record({
    alphabetSize: fc.constantFrom(1, 2, 256, 65536),
    lengths: fc.array(fc.oneof(fc.nat(5), fc.nat(3000)), { minLength: 1, maxLength: 6 }),
    spread: fc.constantFrom(1, 3, 40, 65536),
    seed: fc.nat(2 ** 30),
  })
  .map(({ alphabetSize, lengths, spread, seed }): SymbolSequence => {
    const total = lengths.reduce((a, b) => a + b, 0);
    const symbols = newSymbolArray(alphabetSize, total);
    let state = seed + 1;
    for (let i = 0; i < total; i++) {
      state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
      const drawn = (state >>> 8) % Math.min(alphabetSize, spread);
      symbols[i] = state >>> 28 < 9 && i > 0 ? symbols[i - 1] : drawn;
    }
    let at = 0;
    return { alphabetSize, symbols, messageEnds: Uint32Array.from(lengths, (n) => (at += n)) };
  });

const cases = fc
  .record({
    sequence: sequences,
    candidate: fc.constantFrom(...CANDIDATES),
    policy: fc.constantFrom(...POLICIES),
    lengths: fc.constantFrom('known', 'link', 'sent'),
    align: fc.constantFrom(1, 8, 32),
  })
  .map(({ sequence, candidate: text, policy, lengths, align }): Case | undefined => {
    const candidate = parseCandidate(text);
    if (!candidate.declaration.policies.includes(policy.policy)) return undefined;
    const base: Setup = { ...policy, alphabetSize: sequence.alphabetSize, lengths, align };
    const trains = policy.policy !== 'learned' && base.policy + base.reset !== 'sentmessage';
    const tables = trains ? trainOn(candidate, base, sequence) : undefined;
    const setup = tables === undefined ? base : { ...base, tables };
    const coder = candidate.create();
    try {
      coder.check?.(setup);
    } catch {
      return undefined;
    }
    return { sequence, setup, coder };
  })
  .filter((c) => c !== undefined);

function encodeWhole({ coder, setup, sequence }: Case): Coded {
  const encoder = coder.encoder(setup);
  encoder.push(sequence);
  return encoder.finish();
}

function sourceOf(bytes: Uint8Array, most = Number.POSITIVE_INFINITY): CodedSource {
  return {
    byteLength: bytes.length,
    read(into, at) {
      const piece = bytes.subarray(at, at + Math.min(into.length, most));
      into.set(piece);
      return piece.length;
    },
  };
}

function decodeInPieces(
  { coder, setup, sequence }: Case,
  coded: Coded,
  bytes = coded.bytes,
): { symbols: number[]; ends: number[]; bits: number } {
  const symbols: number[] = [];
  const ends: number[] = [];
  const { tables, ...rest } = setup;
  const steps = coder.inPieces!.decode(
    {
      source: sourceOf(bytes, 1000),
      messageCount: sequence.messageEnds.length,
      windowBytes: 4096,
      ...(setup.lengths === 'link' ? { messageEndsBits: coded.messageEndsBits } : {}),
      ...(setup.lengths === 'known' ? { symbolCounts: symbolCountsOf(sequence) } : {}),
    },
    tables === undefined || setup.policy === 'sent' ? rest : setup,
    { maxSymbols: sequence.symbols.length },
    {
      take: (taken, from, to) => {
        for (let i = from; i < to; i++) symbols.push(taken[i]);
      },
      end: () => ends.push(symbols.length),
    },
  );
  for (;;) {
    const step = steps.next();
    if (step.done) return { symbols, ends, bits: step.value };
  }
}

describe('a coder in pieces', () => {
  test('encodes the bytes and books the bits of the whole, for any chunks', () => {
    fc.assert(
      fc.property(cases, fc.integer({ min: 1, max: 4000 }), (given, size) => {
        const whole = encodeWhole(given);
        const parts: Uint8Array[] = [];
        const encoder = given.coder.encoder({
          ...given.setup,
          sink: (bytes) => parts.push(bytes.slice()),
        });
        for (const chunk of chunksOf(given.sequence, size)) encoder.push(chunk);
        const coded = encoder.finish();
        expect(coded.bytes).toHaveLength(0);
        expect(Buffer.concat(parts)).toEqual(Buffer.from(whole.bytes));
        expect(coded.messageEndsBits).toEqual(whole.messageEndsBits);
        expect(coded.account).toEqual(whole.account);
        expect(coded.payloadBits).toBe(whole.payloadBits);
      }),
      { numRuns: 150 },
    );
  });

  test.each(['huffman', 'arith:order=0', 'arith:order=1,backoff=none'])(
    '%s hands bytes over within one long message',
    (text) => {
      const candidate = parseCandidate(text);
      const symbols = Uint8Array.from({ length: 300_000 }, (_, i) => Math.imul(i, i) >>> 11);
      const sequence = { alphabetSize: 256, symbols, messageEnds: Uint32Array.of(symbols.length) };
      const base: Setup = {
        policy: 'sent',
        reset: 'never',
        alphabetSize: 256,
        lengths: 'sent',
        align: 8,
      };
      const setup = { ...base, tables: trainOn(candidate, base, sequence)! };
      const given = { sequence, setup, coder: candidate.create() };
      const whole = encodeWhole(given);
      const parts: Uint8Array[] = [];
      const encoder = given.coder.encoder({ ...setup, sink: (bytes) => parts.push(bytes.slice()) });
      for (const chunk of chunksOf(sequence, 10_000)) encoder.push(chunk);
      expect(parts.length).toBeGreaterThan(1);
      encoder.finish();
      expect(Buffer.concat(parts)).toEqual(Buffer.from(whole.bytes));
    },
  );

  test('decodes what the whole encoder wrote, through a small window', () => {
    fc.assert(
      fc.property(cases, (given) => {
        // A table of a large alphabet does not fit the window of this test.
        fc.pre(given.sequence.alphabetSize <= 256 || given.setup.policy !== 'sent');
        const coded = encodeWhole(given);
        const decoded = decodeInPieces(given, coded);
        expect(decoded.symbols).toEqual([...given.sequence.symbols]);
        expect(decoded.ends).toEqual([...given.sequence.messageEnds]);
        expect(decoded.bits).toBe(coded.messageEndsBits.at(-1));
      }),
      { numRuns: 150 },
    );
  });

  test('prices as the whole does', () => {
    fc.assert(
      fc.property(cases, fc.integer({ min: 1, max: 4000 }), (given, size) => {
        const whole = given.coder.price!(given.sequence, given.setup);
        const pricer = given.coder.inPieces!.pricer(given.setup);
        for (const chunk of chunksOf(given.sequence, size)) pricer.push(chunk);
        const price = pricer.finish();
        expect(price.messageIdealBits).toHaveLength(whole.messageIdealBits.length);
        price.messageIdealBits.forEach((bits, i) => {
          const expected = whole.messageIdealBits[i];
          expect(Math.abs(bits - expected)).toBeLessThanOrEqual(1e-9 * Math.max(1, expected));
        });
        const order = whole.fit !== undefined && 'order' in whole.fit.of && whole.fit.of.order;
        expect(price.fitOrder).toBe(order === false ? undefined : order);
      }),
      { numRuns: 100 },
    );
  });

  test('meets damaged bytes with an error of the stream, or decodes', () => {
    fc.assert(
      fc.property(
        cases,
        fc.array(fc.tuple(fc.nat(), fc.nat(255)), { minLength: 1, maxLength: 4 }),
        fc.double({ min: 0, max: 1, noNaN: true }),
        (given, changes, kept) => {
          const coded = encodeWhole(given);
          const bytes = coded.bytes.slice(0, Math.ceil(coded.bytes.length * kept));
          for (const [at, value] of changes) if (bytes.length > 0) bytes[at % bytes.length] = value;
          try {
            decodeInPieces(given, coded, bytes);
          } catch (error) {
            if (!(error instanceof CorruptStreamError || error instanceof LimitError)) throw error;
          }
        },
      ),
      { numRuns: 200 },
    );
  });
});
