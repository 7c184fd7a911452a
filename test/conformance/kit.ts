/**
 * The conformance kit: what every coder must keep, whatever it is.
 * `conformance('huffman:maxbits=12')` in a test file declares the tests for each cell kind (policy
 * × reset × lengths) that the coder declares, over aligns and alphabets.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Coded, CodedInput, Coder, Setup } from '../../src/coders/contract.ts';
import { BugError, CorruptStreamError, LimitError } from '../../src/errors/errors.ts';
import { type SymbolSequence, sliceMessages } from '../../src/symbols/sequence.ts';
import {
  accepts,
  type CellKind,
  cellKinds,
  decode,
  encode,
  inputOf,
  train,
  type Unit,
  unitOf,
} from './cells.ts';
import { damaged } from './damage.ts';
import { chunksOf, degenerateSequences, inRecords, sequences } from './sequences.ts';

const SEED = 20_250_117;
const ALIGNS = [1, 8, 16, 32, 64];

export interface ConformanceOptions {
  /** Alphabets to run; those above the coder's largest, or refused by its `check`, are left out. */
  readonly alphabetSizes?: number[];
  /** Drawn sequences for each property of each cell kind; a fifth of it at m > 4096. */
  readonly runs?: number;
  /** What setups carry besides, such as a record: messages are then whole records. */
  readonly setup?: Pick<Setup, 'record' | 'fields'>;
}

function sameSequence(got: SymbolSequence, expected: SymbolSequence) {
  expect(got.alphabetSize).toBe(expected.alphabetSize);
  expect(got.messageEnds).toEqual(expected.messageEnds);
  expect(got.symbols.length).toBe(expected.symbols.length);
  expect(got.symbols.BYTES_PER_ELEMENT).toBe(expected.symbols.BYTES_PER_ELEMENT);
  const at = got.symbols.findIndex((symbol, i) => symbol !== expected.symbols[i]);
  expect(at, 'the first symbol that differs').toBe(-1);
}

function sameCoded(got: Coded, expected: Coded) {
  expect(Buffer.compare(got.bytes, expected.bytes), 'the same bytes').toBe(0);
  expect(got.messageEndsBits).toEqual(expected.messageEndsBits);
  expect(got.account).toEqual(expected.account);
  expect(got.payloadBits).toBe(expected.payloadBits);
}

/** The integer identities of the account, and what the bytes themselves say. */
function checkLedger(coded: Coded, unit: Unit) {
  const { account, messageEndsBits, bytes, payloadBits } = coded;
  const { align } = unit.encoderSetup;
  const messageCount = unit.sequence.messageEnds.length;
  for (const [line, bits] of Object.entries(account)) {
    expect(Number.isSafeInteger(bits), `${line} is an integer`).toBe(true);
    expect(bits, line).toBeGreaterThanOrEqual(0);
  }
  const carriedBits = messageEndsBits.at(-1) ?? 0;
  expect(Object.values(account).reduce((sum, bits) => sum + bits, 0)).toBe(carriedBits);
  expect(messageEndsBits.length).toBe(messageCount);
  expect(bytes.length).toBe(Math.ceil(carriedBits / 8));
  let before = 0;
  for (const end of messageEndsBits) {
    expect(end).toBeGreaterThanOrEqual(before);
    expect(end % align).toBe(0);
    before = end;
  }
  if (carriedBits % 8 !== 0) expect(bytes.at(-1)! & (0xff >>> (carriedBits % 8))).toBe(0);
  expect(account.paddingBits).toBeLessThanOrEqual(messageCount * (align - 1));
  if (unit.encoderSetup.policy !== 'sent') expect(account.tableBits).toBe(0);
  // An ending by phantom zeros saves less than a byte a message.
  expect(Number.isFinite(payloadBits)).toBe(true);
  expect(payloadBits).toBeLessThanOrEqual(
    account.writtenBits + account.endingBits + 8 * messageCount,
  );
}

function checkRoundTrip(coder: Coder, unit: Unit): Coded {
  const { sequence } = unit;
  const before = sequence.symbols.slice();
  const coded = encode(coder, unit.encoderSetup, [sequence]);
  expect(Buffer.compare(bytesOf(sequence.symbols), bytesOf(before)), 'input untouched').toBe(0);
  checkLedger(coded, unit);
  const input = inputOf(unit.decoderSetup, coded, sequence);
  const decoded = decode(coder, unit.decoderSetup, input, sequence.symbols.length);
  sameSequence(decoded.sequence, sequence);
  expect(decoded.bitsConsumed).toBe(coded.messageEndsBits.at(-1) ?? 0);
  return coded;
}

function bytesOf(view: ArrayBufferView): Uint8Array {
  return new Uint8Array(view.buffer, view.byteOffset, view.byteLength);
}

/** Bits `from … to − 1` of the bytes, as text. */
function bitText(bytes: Uint8Array, from: number, to: number): string {
  let text = '';
  for (let at = from; at < to; at++) text += (bytes[Math.floor(at / 8)] >>> (7 - (at % 8))) & 1;
  return text;
}

/** Price must be finite, add up, and keep its shapes; what it says is tested with each coder. */
function checkPrice(coder: Coder, unit: Unit) {
  const price = coder.price?.(unit.sequence, unit.encoderSetup);
  if (price === undefined) return;
  expect(price.messageIdealBits.length).toBe(unit.sequence.messageEnds.length);
  const sum = price.messageIdealBits.reduce((a, b) => a + b, 0);
  expect(Number.isFinite(price.idealBits)).toBe(true);
  expect(Math.abs(sum - price.idealBits)).toBeLessThanOrEqual(1e-9 * price.idealBits + 1e-6);
  for (const bits of price.messageIdealBits) expect(bits).toBeGreaterThanOrEqual(-1e-9);
  if (price.fit === undefined) return;
  expect(Number.isFinite(price.fit.bits)).toBe(true);
  expect(price.fit.bits).toBeGreaterThanOrEqual(-1e-9);
}

/**
 * Decodes bytes nobody wrote: either a typed error, or by luck a sequence that keeps its
 * invariants.
 */
function checkDamaged(coder: Coder, setup: Setup, input: CodedInput, maxSymbols: number) {
  try {
    const { sequence, bitsConsumed } = decode(coder, setup, input, maxSymbols);
    expect(sequence.symbols.length).toBeLessThanOrEqual(maxSymbols);
    expect(sequence.messageEnds.length).toBe(input.messageCount);
    expect(sequence.messageEnds.at(-1) ?? 0).toBe(sequence.symbols.length);
    expect(bitsConsumed).toBeLessThanOrEqual(input.bytes.length * 8);
    expect(sequence.symbols.every((symbol) => symbol < setup.alphabetSize)).toBe(true);
  } catch (error) {
    if (error instanceof CorruptStreamError || error instanceof LimitError) return;
    throw error;
  }
}

/** Declares the tests of one candidate. */
export function conformance(candidate: string, options: ConformanceOptions = {}): void {
  const alphabetSizes = options.alphabetSizes ?? [1, 2, 3, 256, 65536];
  const runs = options.runs ?? 20;
  const { declaration, create } = parseCandidate(candidate);

  describe(`conformance of ${candidate}`, () => {
    for (const kind of cellKinds(declaration)) {
      const title = `${kind.policy}, reset ${kind.reset}, lengths ${kind.lengths}`;
      const more = options.setup ?? {};
      describe(title, () => cellTests(create(), kind, alphabetSizes, runs, more));
    }
  });
}

function cellTests(
  coder: Coder,
  kind: CellKind,
  alphabetSizes: number[],
  runs: number,
  more: Pick<Setup, 'record' | 'fields'>,
) {
  const taken = alphabetSizes.filter((alphabetSize) =>
    accepts(coder, { ...more, ...kind, align: 8, alphabetSize }),
  );

  const wholeUnits = (sequence: SymbolSequence) =>
    more.record === undefined ? sequence : inRecords(sequence, more.record.bytes);

  it('takes one of the alphabets', () => {
    expect(taken).not.toEqual([]);
  });

  for (const alphabetSize of taken) {
    const setups = ALIGNS.map((align): Setup => ({ ...more, ...kind, align, alphabetSize }));
    const parameters = {
      seed: SEED,
      numRuns: alphabetSize > 4096 ? Math.ceil(runs / 5) : runs,
    };
    const units = fc
      .tuple(fc.constantFrom(...setups), sequences(alphabetSize))
      .map(([setup, sequence]) => ({ setup, whole: wholeUnits(sequence) }));

    it(`m = ${alphabetSize}: degenerate sequences come back, each bit booked`, () => {
      for (const [i, [, whole]] of degenerateSequences(alphabetSize).entries()) {
        const unit = unitOf(coder, setups[i % setups.length], wholeUnits(whole));
        checkRoundTrip(coder, unit);
        checkPrice(coder, unit);
      }
    });

    it(`m = ${alphabetSize}: drawn sequences come back, each bit booked`, () => {
      fc.assert(
        fc.property(units, ({ setup, whole }) => {
          const unit = unitOf(coder, setup, whole);
          checkRoundTrip(coder, unit);
          checkPrice(coder, unit);
        }),
        parameters,
      );
    });

    it(`m = ${alphabetSize}: any cut into chunks gives the same tables and bytes`, () => {
      const cuts = fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { maxLength: 6 });
      fc.assert(
        fc.property(units, cuts, fc.boolean(), ({ setup, whole }, shares, emptiesLater) => {
          const unit = unitOf(coder, setup, whole);
          const { sequence } = unit;
          const expected = encode(coder, unit.encoderSetup, [sequence]);
          const places = shares.map((share) => Math.floor(share * sequence.symbols.length));
          const chunks = chunksOf(sequence, places, emptiesLater);
          sameCoded(encode(coder, unit.encoderSetup, chunks), expected);
          if (setup.policy === 'sent' && unit.encoderSetup.tables !== undefined) {
            const tables = train(coder, setup, chunks);
            sameCoded(encode(coder, { ...setup, tables }, [sequence]), expected);
          }
        }),
        parameters,
      );
    });

    it(`m = ${alphabetSize}: bytes after the end are left alone, a decoder can be used again`, () => {
      fc.assert(
        fc.property(units, ({ setup, whole }) => {
          const unit = unitOf(coder, setup, whole);
          const coded = encode(coder, unit.encoderSetup, [unit.sequence]);
          const input = inputOf(unit.decoderSetup, coded, unit.sequence);
          const longer = new Uint8Array(coded.bytes.length + 9).fill(0xff);
          longer.set(coded.bytes);
          const limits = { maxSymbols: unit.sequence.symbols.length };
          const decoder = coder.decoder(unit.decoderSetup, limits);
          for (const bytes of [longer, coded.bytes]) {
            const decoded = decoder.decode({ ...input, bytes });
            sameSequence(decoded.sequence, unit.sequence);
            expect(decoded.bitsConsumed).toBe(coded.messageEndsBits.at(-1) ?? 0);
          }
        }),
        parameters,
      );
    });

    if (kind.reset === 'message') {
      it(`m = ${alphabetSize}: a message has the same bits when it is coded alone`, () => {
        fc.assert(
          fc.property(units, fc.nat(), ({ setup, whole }, pick) => {
            const unit = unitOf(coder, setup, whole);
            const count = unit.sequence.messageEnds.length;
            fc.pre(count > 0);
            const i = pick % count;
            const coded = encode(coder, unit.encoderSetup, [unit.sequence]);
            const alone = encode(coder, unit.encoderSetup, [
              sliceMessages(unit.sequence, i, i + 1),
            ]);
            const from = i === 0 ? 0 : coded.messageEndsBits[i - 1];
            expect(bitText(alone.bytes, 0, alone.messageEndsBits[0])).toBe(
              bitText(coded.bytes, from, coded.messageEndsBits[i]),
            );
          }),
          parameters,
        );
      });
    }

    it(`m = ${alphabetSize}: damaged and foreign bytes give a typed error or a bounded decode`, () => {
      fc.assert(
        fc.property(units, fc.nat(), ({ setup, whole }, seed) => {
          const unit = unitOf(coder, setup, whole);
          const coded = encode(coder, unit.encoderSetup, [unit.sequence]);
          const input = inputOf(unit.decoderSetup, coded, unit.sequence);
          const maxSymbols = unit.sequence.symbols.length * 2 + 64;
          for (const other of damaged(input, seed, setup.align))
            checkDamaged(coder, unit.decoderSetup, other, maxSymbols);
        }),
        parameters,
      );
    });

    it(`m = ${alphabetSize}: the symbol limit holds at its edge`, () => {
      fc.assert(
        fc.property(units, ({ setup, whole }) => {
          const unit = unitOf(coder, setup, whole);
          const count = unit.sequence.symbols.length;
          fc.pre(count > 0);
          const coded = encode(coder, unit.encoderSetup, [unit.sequence]);
          const input = inputOf(unit.decoderSetup, coded, unit.sequence);
          expect(() => decode(coder, unit.decoderSetup, input, count - 1)).toThrow(LimitError);
          sameSequence(decode(coder, unit.decoderSetup, input, count).sequence, unit.sequence);
        }),
        { ...parameters, numRuns: Math.ceil(parameters.numRuns / 2) },
      );
    });

    it(`m = ${alphabetSize}: an encoder refuses to finish within a message`, () => {
      const whole = wholeUnits(degenerateSequences(alphabetSize)[11][1]);
      const unit = unitOf(coder, setups[0], whole);
      const [chunk] = chunksOf(unit.sequence, [unit.sequence.symbols.length - 1]);
      const encoder = coder.encoder(unit.encoderSetup);
      encoder.push(chunk);
      expect(() => encoder.finish()).toThrow(BugError);
    });
  }
}
