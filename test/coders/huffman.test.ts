import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Coder, Setup } from '../../src/coders/contract.ts';
import { SymbolCounts } from '../../src/coders/huffman-counts.ts';
import { BugError, CorruptStreamError, InputError, PromiseError } from '../../src/errors/errors.ts';
import { newSymbolArray, oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';
import { decode, encode, inputOf, train } from '../conformance/cells.ts';
import { integers, sequences } from '../conformance/sequences.ts';
import { sumOfMergedWeights } from '../stages/huffman-oracles.ts';

const coder = parseCandidate('huffman').create();

function setupOf(changes: Partial<Setup>): Setup {
  return {
    policy: 'sent',
    alphabetSize: 256,
    reset: 'message',
    lengths: 'known',
    align: 1,
    ...changes,
  };
}

function sequenceOf(alphabetSize: number, messages: number[][]): SymbolSequence {
  const symbols = newSymbolArray(alphabetSize, messages.flat().length);
  symbols.set(messages.flat());
  let end = 0;
  const messageEnds = Uint32Array.from(messages, (message) => {
    end += message.length;
    return end;
  });
  return { alphabetSize, symbols, messageEnds };
}

/** Counts by a map: the plain second count. */
function countsOf(symbols: Iterable<number>): Map<number, number> {
  const counts = new Map<number, number>();
  for (const symbol of symbols) counts.set(symbol, (counts.get(symbol) ?? 0) + 1);
  return counts;
}

function entropyBits(counts: Iterable<number>): number {
  const list = [...counts];
  const total = list.reduce((a, b) => a + b, 0);
  return list.reduce((bits, count) => bits + count * Math.log2(total / count), 0);
}

function messagesOf({ symbols, messageEnds }: SymbolSequence): number[][] {
  return Array.from(messageEnds, (end, i) =>
    Array.from(symbols.subarray(i === 0 ? 0 : messageEnds[i - 1], end)),
  );
}

const drawn = fc.constantFrom(1, 2, 3, 256, 5000).chain((m) => sequences(m));

describe('huffman, sent', () => {
  it('writes as many bits as the sum of merged weights, for the unit and for each message', () => {
    fc.assert(
      fc.property(drawn, (sequence) => {
        const { alphabetSize } = sequence;
        const unit = setupOf({ alphabetSize, reset: 'never' });
        const tables = train(coder, unit, [sequence]);
        const whole = encode(coder, { ...unit, tables }, [sequence]);
        const expected = sumOfMergedWeights(countsOf(sequence.symbols).values());
        expect(BigInt(whole.account.writtenBits)).toBe(expected);
        expect(whole.payloadBits).toBe(whole.account.writtenBits);

        const each = encode(coder, setupOf({ alphabetSize }), [sequence]);
        const sums = messagesOf(sequence).map((message) =>
          sumOfMergedWeights(countsOf(message).values()),
        );
        expect(BigInt(each.account.writtenBits)).toBe(sums.reduce((a, b) => a + b, 0n));
      }),
    );
  });

  it('codes a dyadic source at exactly its entropy', () => {
    // Probabilities 1/2 1/4 1/8 1/16 1/16: 1.875 bits a symbol.
    const message = [8, 4, 2, 1, 1].flatMap((count, symbol) => Array(count).fill(symbol));
    const sequence = sequenceOf(5, [message, message]);
    const coded = encode(coder, setupOf({ alphabetSize: 5 }), [sequence]);
    expect(coded.payloadBits).toBe(2 * 30);
    const price = coder.price!(sequence, setupOf({ alphabetSize: 5 }));
    expect(price.idealBits).toBe(2 * 30);
    expect(Array.from(price.messageIdealBits)).toEqual([30, 30]);
    expect(price.fit).toEqual({ bits: 60, of: { order: 0 } });
  });

  it('writes the table once, in the first message that has symbols, or anew in each', () => {
    const sequence = sequenceOf(256, [[], [], [7, 9, 7], [9], []]);
    const unit = setupOf({ reset: 'never' });
    const never = encode(coder, { ...unit, tables: train(coder, unit, [sequence]) }, [sequence]);
    const starts = [0, ...never.messageEndsBits];
    const sizes = Array.from(never.messageEndsBits, (end, i) => end - starts[i]);
    expect(sizes).toEqual([0, 0, never.account.tableBits + 3, 1, 0]);

    const each = encode(coder, setupOf({}), [sequence]);
    const [first, second] = [
      encode(coder, setupOf({}), [sequenceOf(256, [[7, 9, 7]])]),
      encode(coder, setupOf({}), [sequenceOf(256, [[9]])]),
    ];
    expect(each.account.tableBits).toBe(first.account.tableBits + second.account.tableBits);
    // A lone symbol: its table, and no payload.
    expect(second.payloadBits).toBe(0);
    expect(each.account.writtenBits).toBe(3);
  });

  it('needs no table for no symbols, and no bits for the only symbol there is', () => {
    const empty = sequenceOf(256, [[], []]);
    for (const reset of ['message', 'never'] as const) {
      const setup = setupOf({ reset });
      const tables = train(coder, setup, [empty]);
      const coded = encode(coder, reset === 'never' ? { ...setup, tables } : setup, [empty]);
      expect(coded.bytes.length).toBe(0);
    }
    const lone = oneMessage(new Uint8Array(1000), 1);
    const coded = encode(coder, setupOf({ alphabetSize: 1 }), [lone]);
    // The table of one symbol of one: the count 1 − 1 in one bit.
    expect(coded.account.tableBits).toBe(1);
    expect(coded.payloadBits).toBe(0);
    expect(coded.messageEndsBits[0]).toBe(1);
  });

  it('prices its words by the frequencies, never above them by a bit a symbol', () => {
    fc.assert(
      fc.property(drawn, (sequence) => {
        const { alphabetSize } = sequence;
        const whole = entropyBits(countsOf(sequence.symbols).values());
        const each = messagesOf(sequence).map((m) => entropyBits(countsOf(m).values()));
        for (const reset of ['message', 'never'] as const) {
          const setup = setupOf({ alphabetSize, reset });
          const tables = train(coder, setup, [sequence]);
          const coding = reset === 'never' ? { ...setup, tables } : setup;
          const price = coder.price!(sequence, coding);
          expect(price.fit?.bits).toBeCloseTo(whole, 6);
          const ideal = reset === 'never' ? whole : each.reduce((a, b) => a + b, 0);
          expect(price.idealBits).toBeCloseTo(ideal, 6);
          if (reset === 'message')
            for (const [i, bits] of each.entries())
              expect(price.messageIdealBits[i]).toBeCloseTo(bits, 6);
          const { payloadBits } = encode(coder, coding, [sequence]);
          // Rounding to whole bits never gains under sent tables, and costs less than a bit a
          // symbol.
          expect(payloadBits).toBeGreaterThanOrEqual(price.idealBits - 1e-6);
          expect(payloadBits).toBeLessThanOrEqual(price.idealBits + sequence.symbols.length);
        }
      }),
    );
  });

  it('refuses to read a table that names more symbols than the message has', () => {
    const setup = setupOf({});
    const { bytes } = encode(coder, setup, [sequenceOf(256, [[1, 2]])]);
    const read = (count: number) =>
      decode(coder, setup, { bytes, messageCount: 1, symbolCounts: Uint32Array.of(count) }, 9);
    expect(Array.from(read(2).sequence.symbols)).toEqual([1, 2]);
    expect(() => read(1)).toThrow(CorruptStreamError);
  });

  it('refuses symbols that its tables were not fitted to', () => {
    const setup = setupOf({ reset: 'never' });
    const tables = train(coder, setup, [sequenceOf(256, [[1, 2, 3]])]);
    const encoder = coder.encoder({ ...setup, tables });
    expect(() => encoder.push(sequenceOf(256, [[1, 4]]))).toThrow(PromiseError);
  });
});

describe('huffman, shipped', () => {
  it('sends no tables and has a word for every symbol', () => {
    const setup = setupOf({ policy: 'shipped' });
    const tables = train(coder, setup, [sequenceOf(256, [[1, 1, 1, 2]])]);
    const both = { ...setup, tables };
    const sequence = sequenceOf(256, [Array.from({ length: 256 }, (_, i) => i)]);
    const coded = encode(coder, both, [sequence]);
    expect(coded.account.tableBits).toBe(0);
    const input = inputOf(both, coded, sequence);
    expect(decode(coder, both, input, 256).sequence.symbols).toEqual(sequence.symbols);
  });

  it.each([
    ['add:1/2', 1, 2],
    ['add:1', 1, 1],
    ['add:1/256', 1, 256],
    ['add:2.5', 5, 2],
  ])('unseen=%s: words and price are those of count + X', (unseen, p, q) => {
    const other = parseCandidate(`huffman:unseen=${unseen}`).create();
    fc.assert(
      fc.property(sequences(40), sequences(40), (trained, coded) => {
        const setup = setupOf({ policy: 'shipped', alphabetSize: 40 });
        const tables = train(other, setup, [trained]);
        const counts = countsOf(trained.symbols);
        const weights = Array.from({ length: 40 }, (_, s) => (counts.get(s) ?? 0) * q + p);
        const total = weights.reduce((a, b) => a + b);
        const price = other.price!(coded, { ...setup, tables });
        let ideal = 0;
        for (const symbol of coded.symbols) ideal -= Math.log2(weights[symbol] / total);
        expect(price.idealBits).toBeCloseTo(ideal, 5);
        // On a message that holds each symbol as often as it weighs, no code is shorter.
        if (weights.some((weight) => weight > 2000)) return;
        const own = weights.flatMap((weight, symbol) => Array(weight).fill(symbol));
        const { payloadBits } = encode(other, { ...setup, tables }, [sequenceOf(40, [own])]);
        expect(BigInt(payloadBits)).toBe(sumOfMergedWeights(weights));
      }),
      { numRuns: 25 },
    );
  });

  it('makes its tables once for many units', () => {
    const alphabetSize = 65536;
    const setup = setupOf({ policy: 'shipped', alphabetSize });
    const next = integers(5);
    const tables = train(coder, setup, [
      oneMessage(
        Uint16Array.from({ length: 3000 }, () => next() % 500),
        alphabetSize,
      ),
    ]);
    const both = { ...setup, tables };
    const sequence = oneMessage(Uint16Array.of(1, 2, 3), alphabetSize);
    const first = encode(coder, both, [sequence]);
    // A thousand units with a table of 65 536 words each would take minutes.
    for (let i = 0; i < 1000; i++) {
      const coded = encode(coder, both, [sequence]);
      expect(coded.bytes).toEqual(first.bytes);
      expect(decode(coder, both, inputOf(both, coded, sequence), 3).sequence.symbols).toEqual(
        sequence.symbols,
      );
    }
  });
});

describe('what huffman is told', () => {
  const small = (maxbits: number): Coder => parseCandidate(`huffman:maxbits=${maxbits}`).create();

  it('maxbits: the least that gives every symbol a word', () => {
    for (const [alphabetSize, least] of [
      [2, 1],
      [256, 8],
      [257, 9],
      [65536, 16],
    ]) {
      const setup = setupOf({ alphabetSize });
      small(least).check!(setup);
      if (least === 1) continue;
      expect(() => small(least - 1).check!(setup)).toThrow(
        expect.objectContaining({
          name: 'InputError',
          where: expect.objectContaining({ key: 'maxbits', expected: `at least ${least}` }),
        }),
      );
    }
  });

  it('maxbits: no word is longer, under either policy', () => {
    const weights = Array.from({ length: 20 }, (_, i) => 2 ** (i >> 1));
    const message = weights.flatMap((count, symbol) => Array(count).fill(symbol));
    const sequence = sequenceOf(20, [message]);
    const rare = sequenceOf(20, [[0]]);
    for (const maxbits of [5, 6, 7]) {
      const limited = small(maxbits);
      const setup = setupOf({ alphabetSize: 20, policy: 'shipped' });
      const tables = train(limited, setup, [sequence]);
      expect(encode(limited, { ...setup, tables }, [rare]).payloadBits).toBe(maxbits);
    }
  });

  it('refuses policies and alphabets that it does not have', () => {
    expect(() => coder.check!(setupOf({ policy: 'learned' }))).toThrow(InputError);
    expect(() => coder.check!(setupOf({ alphabetSize: 2 ** 24 + 1 }))).toThrow(InputError);
    expect(() => parseCandidate('huffman:maxbits=33')).toThrow(InputError);
    expect(() => parseCandidate('huffman:maxbits=0')).toThrow(InputError);
    expect(() => parseCandidate('huffman:unseen=escape')).toThrow(InputError);
  });

  it('refuses to start without tables, or with others’', () => {
    const setup = setupOf({ policy: 'shipped' });
    expect(() => coder.encoder(setup)).toThrow(BugError);
    const tables = train(coder, { ...setup, alphabetSize: 2 }, [sequenceOf(2, [[0, 1]])]);
    expect(() => coder.encoder({ ...setup, tables })).toThrow(BugError);
    expect(() =>
      coder.decoder({ ...setup, tables: { coder: 'arith' } }, { maxSymbols: 1 }),
    ).toThrow(BugError);
  });

  it('shows its tables', () => {
    const setup = setupOf({ alphabetSize: 4, policy: 'sent', reset: 'never' });
    const sequence = sequenceOf(4, [[0, 0, 0, 0, 1, 1, 3]]);
    const tables = train(coder, setup, [sequence]);
    const { account } = encode(coder, { ...setup, tables }, [sequence]);
    expect(coder.describeTables!(tables, setup)).toEqual([
      '3 of 4 symbols seen in 7 counted',
      '3 code words of 1 to 2 bits, at most 24 allowed',
      `sent in ${account.tableBits} bits`,
      'symbol 0: 4 times, word 0',
      'symbol 1: 2 times, word 10',
      'symbol 3: 1 times, word 11',
    ]);
    const nothing = train(coder, setup, [sequenceOf(4, [[]])]);
    expect(coder.describeTables!(nothing, setup)).toEqual(['0 of 4 symbols seen in 0 counted']);
  });
});

describe('symbol counts', () => {
  it('equal a count by a map, in any pieces, and are empty after clearing', () => {
    fc.assert(
      fc.property(drawn, fc.nat(), (sequence, pick) => {
        const counts = new SymbolCounts(sequence.alphabetSize);
        counts.add(sequence.symbols.slice().fill(0), 0, sequence.symbols.length);
        counts.clear();
        const cut = pick % (sequence.symbols.length + 1);
        counts.add(sequence.symbols, 0, cut);
        counts.add(sequence.symbols, cut, sequence.symbols.length);
        counts.sort();
        const expected = [...countsOf(sequence.symbols)].sort(([a], [b]) => a - b);
        const got = Array.from(counts.seen.subarray(0, counts.seenCount), (s) => [
          s,
          counts.counts[s],
        ]);
        expect(got).toEqual(expected);
        expect(counts.total).toBe(sequence.symbols.length);
        expect(counts.counts.reduce((a, b) => a + b, 0)).toBe(sequence.symbols.length);
      }),
    );
  });

  it('of bytes at any alignment', () => {
    const next = integers(3);
    const buffer = Uint8Array.from({ length: 9000 }, () => next() & 0xff);
    for (let from = 0; from < 9; from++) {
      const counts = new SymbolCounts(256);
      const view = buffer.subarray(from, buffer.length - ((from * 3) % 5));
      counts.add(view, 1, view.length - 2);
      const expected = countsOf(view.subarray(1, view.length - 2));
      for (let symbol = 0; symbol < 256; symbol++)
        expect(counts.counts[symbol]).toBe(expected.get(symbol) ?? 0);
    }
  });
});

describe('many short messages', () => {
  it('cost about what one long message does: 200 000 with a table each, within the time of a test', () => {
    const count = 200_000;
    const next = integers(9);
    const symbols = Uint8Array.from({ length: 4 * count }, () => 97 + (next() % 4));
    const messageEnds = Uint32Array.from({ length: count }, (_, i) => 4 * (i + 1));
    const sequence = { alphabetSize: 256, symbols, messageEnds };
    const setup = setupOf({ lengths: 'sent', align: 8 });
    const coded = encode(coder, setup, [sequence]);
    const decoded = decode(coder, setup, inputOf(setup, coded, sequence), symbols.length);
    expect(Buffer.compare(decoded.sequence.symbols as Uint8Array, symbols)).toBe(0);
    expect(decoded.bitsConsumed).toBe(coded.messageEndsBits.at(-1));
  });
});

describe('two encoders of one pair of tables', () => {
  it('do not disturb one another when they are pushed in turn', () => {
    const setup = setupOf({ policy: 'shipped', alphabetSize: 3 });
    const sequence = sequenceOf(3, [[0, 1, 2, 2, 2, 1]]);
    const both = { ...setup, tables: train(coder, setup, [sequence]) };
    const expected = encode(coder, both, [sequence]).bytes;
    const encoders = [coder.encoder(both), coder.encoder(both)];
    for (const encoder of encoders) encoder.push(sequence);
    for (const encoder of encoders) expect(encoder.finish().bytes).toEqual(expected);
  });
});
