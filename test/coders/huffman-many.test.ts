/**
 * The kernels that code many short messages at once, held to the plain path, which codes one by one: bytes, ends, account,
 * symbols and errors are the same. A push of fewer than four messages, and a decoder that is told where each message
 * starts, take the plain path.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type {
  Coded,
  CodedInput,
  Decoded,
  DecodeLimits,
  Encoder,
  Setup,
} from '../../src/coders/contract.ts';
import { huffman } from '../../src/coders/huffman.ts';
import { shippedReader } from '../../src/coders/huffman-decoder.ts';
import { streamEncoder } from '../../src/coders/huffman-encoder.ts';
import { BitassayError, LimitError, PromiseError } from '../../src/errors/errors.ts';
import { ABSENT, codeLengths } from '../../src/stages/code-lengths.ts';
import { PrefixDecoder } from '../../src/stages/prefix-decoder.ts';
import { PrefixEncoder } from '../../src/stages/prefix-encoder.ts';
import { newSymbolArray, type SymbolSequence } from '../../src/symbols/sequence.ts';
import { integers } from '../conformance/sequences.ts';

interface Case {
  readonly setup: Setup;
  readonly words: { symbols: Uint32Array; lengths: Uint8Array };
  readonly sequence: SymbolSequence;
}

function caseOf(
  alphabetSize: number,
  maxBits: number,
  frame: Pick<Setup, 'align' | 'lengths' | 'unitSymbols'>,
  shape: { messages: number; longest: number },
  seed: number,
): Case {
  const next = integers(seed);
  const style = next() % 4;
  const weights = Array.from({ length: alphabetSize }, (_, i) => {
    if (style === 0) return 1 + (next() % 5);
    if (style === 1) return next() % 3 === 0 ? 1 + (next() % 1000) : 0;
    if (style === 2) return Math.max(1, Math.floor(2 ** (40 - (i % 60))));
    return 2 ** (next() % 32);
  });
  weights[next() % alphabetSize] ||= 1;
  const all = codeLengths(weights, maxBits);
  const symbols = Uint32Array.from(all.keys()).filter((symbol) => all[symbol] !== ABSENT);
  const lengths = Uint8Array.from(symbols, (symbol) => all[symbol]);
  const order = Uint32Array.from(symbols).sort((a, b) => all[a] - all[b]);

  const unit = frame.unitSymbols ?? 1;
  const ends: number[] = [];
  let end = 0;
  for (let i = 0; i < shape.messages; i++) {
    const length = next() % 50 === 0 ? 4000 + (next() % 200) : next() % shape.longest;
    end += Math.floor(length / unit) * unit;
    ends.push(end);
  }
  const content = newSymbolArray(alphabetSize, end);
  // Mostly symbols with short words, as in life; now and then any.
  for (let i = 0; i < end; i++) {
    const reach = next() % 20 === 0 ? order.length : Math.min(order.length, 12);
    content[i] = order[next() % reach];
  }
  return {
    setup: { policy: 'shipped', alphabetSize, reset: 'message', ...frame },
    words: { symbols, lengths },
    sequence: { alphabetSize, symbols: content, messageEnds: Uint32Array.from(ends) },
  };
}

const cases = fc
  .record({
    alphabetSize: fc.constantFrom(1, 2, 3, 40, 256, 256, 256, 257),
    maxBits: fc.constantFrom(12, 16, 24, 32),
    align: fc.constantFrom(1, 2, 4, 8, 8, 16, 24, 32, 40),
    lengths: fc.constantFrom('known', 'link', 'sent'),
    unitSymbols: fc.constantFrom(1, 1, 3),
    messages: fc.constantFrom(0, 3, 4, 60, 400),
    longest: fc.constantFrom(1, 6, 40, 300),
    seed: fc.integer({ min: 1, max: 0x7fffffff }),
  })
  .map(({ alphabetSize, maxBits, align, lengths, unitSymbols, messages, longest, seed }) =>
    caseOf(
      alphabetSize,
      maxBits,
      { align, lengths, unitSymbols } as Pick<Setup, 'align' | 'lengths' | 'unitSymbols'>,
      { messages, longest },
      seed,
    ),
  );

function encoderOf({ setup, words }: Case): Encoder {
  const encoder = new PrefixEncoder(setup.alphabetSize);
  encoder.setWords(words.symbols, words.lengths, words.symbols.length);
  return streamEncoder(setup, encoder, undefined, 0);
}

function encodeAtOnce(given: Case): Coded {
  const encoder = encoderOf(given);
  encoder.push(given.sequence);
  return encoder.finish();
}

/** Pushes of `most` messages. */
function encodeBy(most: number, given: Case): Coded {
  const { alphabetSize, symbols, messageEnds } = given.sequence;
  const encoder = encoderOf(given);
  for (let i = 0; i < messageEnds.length; i += most) {
    const from = i === 0 ? 0 : messageEnds[i - 1];
    const ends = messageEnds.subarray(i, i + most);
    encoder.push({
      alphabetSize,
      symbols: symbols.subarray(from, ends[ends.length - 1]),
      messageEnds: ends.map((end) => end - from),
    });
  }
  return encoder.finish();
}

function inputOf({ setup, sequence }: Case, coded: Coded): CodedInput {
  const { messageEnds } = sequence;
  return {
    bytes: coded.bytes,
    messageCount: messageEnds.length,
    ...(setup.lengths === 'link' ? { messageEndsBits: coded.messageEndsBits } : {}),
    ...(setup.lengths === 'known'
      ? { symbolCounts: messageEnds.map((end, i) => end - (i === 0 ? 0 : messageEnds[i - 1])) }
      : {}),
  };
}

function decode(
  { setup, words }: Case,
  input: CodedInput,
  path: 'plain' | 'many',
  limits: DecodeLimits,
): Decoded {
  const decoder = new PrefixDecoder(setup.alphabetSize);
  decoder.setWords(words.symbols, words.lengths, words.symbols.length, Number.POSITIVE_INFINITY);
  return shippedReader(setup, limits, decoder).decode(
    path === 'many' ? input : { ...input, startOf: (_, endBits) => endBits },
  );
}

/** Its bytes as text: compared at once, where deep equality goes entry by entry. */
function textOf({ buffer, byteOffset, byteLength }: NodeJS.TypedArray): string {
  return Buffer.from(buffer, byteOffset, byteLength).toString('latin1');
}

function inTexts(coded: Coded): unknown {
  const { bytes, messageEndsBits, ...rest } = coded;
  return { ...rest, bytes: textOf(bytes), ends: textOf(messageEndsBits) };
}

/** What came out, or the error in all its parts. */
function outcome(run: () => Decoded): unknown {
  try {
    const { sequence, bitsConsumed } = run();
    return {
      symbols: textOf(sequence.symbols),
      ends: textOf(sequence.messageEnds),
      bitsConsumed,
    };
  } catch (error) {
    if (!(error instanceof BitassayError)) throw error;
    return { name: error.name, message: error.message, where: error.where };
  }
}

function expectSameOutcome(given: Case, input: CodedInput, limits: DecodeLimits): void {
  const many = outcome(() => decode(given, input, 'many', limits));
  expect(many).toEqual(outcome(() => decode(given, input, 'plain', limits)));
}

describe('many short messages at once', () => {
  it('are encoded to the bits of the plain path', () => {
    fc.assert(
      fc.property(cases, (given) => {
        expect(inTexts(encodeAtOnce(given))).toEqual(inTexts(encodeBy(3, given)));
      }),
      { numRuns: 150 },
    );
  });

  it('take their words in pairs, and bytes of the sink, as the plain path does', () => {
    for (const align of [1, 8, 24, 32]) {
      const given = caseOf(
        256,
        24,
        { align, lengths: 'sent' },
        { messages: 9000, longest: 40 },
        align + 5,
      );
      const plain = encodeBy(3, given);
      expect(inTexts(encodeAtOnce(given))).toEqual(inTexts(plain));
      const parts: Uint8Array[] = [];
      const drained = encodeAtOnce({
        ...given,
        setup: { ...given.setup, sink: (bytes) => parts.push(bytes.slice()) },
      });
      expect(parts.length).toBeGreaterThan(1);
      expect(Buffer.concat(parts).equals(plain.bytes)).toBe(true);
      expect(inTexts({ ...drained, bytes: plain.bytes })).toEqual(inTexts(plain));
    }
  });

  it('are decoded as by the plain path', () => {
    fc.assert(
      fc.property(cases, (given) => {
        const input = inputOf(given, encodeAtOnce(given));
        const limits = { maxSymbols: given.sequence.symbols.length };
        expect(outcome(() => decode(given, input, 'many', limits))).toEqual({
          symbols: textOf(given.sequence.symbols),
          ends: textOf(given.sequence.messageEnds),
          bitsConsumed: encodeAtOnce(given).messageEndsBits.at(-1) ?? 0,
        });
        expectSameOutcome(given, input, limits);
      }),
      { numRuns: 150 },
    );
  });

  it('are refused, or by luck decoded, as by the plain path when the bytes are damaged', () => {
    fc.assert(
      fc.property(cases, fc.integer({ min: 1, max: 0x7fffffff }), (given, seed) => {
        const input = inputOf(given, encodeAtOnce(given));
        const limits = { maxSymbols: given.sequence.symbols.length + 100 };
        const next = integers(seed);
        const flipped = input.bytes.slice();
        for (let flips = 1 + (next() % 3); flips > 0 && flipped.length > 0; flips--)
          flipped[next() % flipped.length] ^= 1 << (next() % 8);
        expectSameOutcome(given, { ...input, bytes: flipped }, limits);
        const cut = input.bytes.subarray(0, next() % (input.bytes.length + 1));
        expectSameOutcome(given, { ...input, bytes: cut }, limits);
        const noise = input.bytes.map(() => next());
        expectSameOutcome(given, { ...input, bytes: noise }, limits);
        const { messageEndsBits, symbolCounts } = input;
        if (messageEndsBits !== undefined && messageEndsBits.length > 0) {
          const moved = messageEndsBits.slice();
          moved[next() % moved.length] += (next() % 3) - 1;
          expectSameOutcome(given, { ...input, messageEndsBits: moved }, limits);
        }
        if (symbolCounts !== undefined && symbolCounts.length > 0) {
          const moved = symbolCounts.slice();
          moved[next() % moved.length] += (next() % 3) - 1;
          expectSameOutcome(given, { ...input, symbolCounts: moved }, limits);
        }
      }),
      { numRuns: 150 },
    );
  });

  it('stop at the limit of symbols, at the very message', () => {
    const given = caseOf(256, 16, { align: 8, lengths: 'sent' }, { messages: 300, longest: 40 }, 9);
    const input = inputOf(given, encodeAtOnce(given));
    const { length } = given.sequence.symbols;
    for (const maxSymbols of [0, 1, length >> 1, length - 1, length, length + 1])
      expectSameOutcome(given, input, { maxSymbols });
    expect(() => decode(given, input, 'many', { maxSymbols: length - 1 })).toThrow(LimitError);
  });

  it('name a symbol without a word by its place in the push', () => {
    const given = caseOf(256, 16, { align: 8, lengths: 'link' }, { messages: 50, longest: 9 }, 4);
    const symbols = given.sequence.symbols.slice();
    const known = new Set(given.words.symbols);
    const strange = Array.from({ length: 256 }, (_, i) => i).find((symbol) => !known.has(symbol));
    symbols[100] = strange!;
    const encoder = encoderOf(given);
    expect(() => encoder.push({ ...given.sequence, symbols })).toThrow(PromiseError);
    expect(() => encoderOf(given).push({ ...given.sequence, symbols })).toThrow(
      expect.objectContaining({
        where: expect.objectContaining({ symbolIndex: 100, got: `symbol ${strange}` }),
      }),
    );
  });

  it('follow a table that is sent in the first of them', () => {
    const { sequence } = caseOf(
      256,
      16,
      { align: 8, lengths: 'sent' },
      { messages: 400, longest: 40 },
      77,
    );
    const coder = huffman.create({ maxbits: 24, unseen: 'add:1/2' });
    const setup: Setup = {
      policy: 'sent',
      alphabetSize: 256,
      reset: 'never',
      lengths: 'link',
      align: 8,
    };
    const trainer = coder.trainer!(setup);
    trainer.push(sequence);
    const encoder = coder.encoder({ ...setup, tables: trainer.finish() });
    encoder.push(sequence);
    const { bytes, messageEndsBits } = encoder.finish();
    const input = { bytes, messageEndsBits, messageCount: sequence.messageEnds.length };
    const limits = { maxSymbols: sequence.symbols.length };
    const { sequence: back } = coder.decoder(setup, limits).decode(input);
    expect(back.symbols).toEqual(sequence.symbols);
    expect(back.messageEnds).toEqual(sequence.messageEnds);
  });
});
