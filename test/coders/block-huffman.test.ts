import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  expandKeys,
  MOST_NGRAMS,
  NgramCutter,
  NgramIndex,
  ngramSpace,
} from '../../src/coders/block-huffman-ngrams.ts';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Coder, Setup } from '../../src/coders/contract.ts';
import { BugError, InputError, LimitError, PromiseError } from '../../src/errors/errors.ts';
import { newSymbolArray, oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';
import { decode, encode, inputOf, train } from '../conformance/cells.ts';
import { integers, sequences } from '../conformance/sequences.ts';
import { sumOfMergedWeights } from '../stages/huffman-oracles.ts';

function coderOf(n: number): Coder {
  return parseCandidate(`block-huffman:n=${n}`).create();
}

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

function messagesOf({ symbols, messageEnds }: SymbolSequence): number[][] {
  return Array.from(messageEnds, (end, i) =>
    Array.from(symbols.subarray(i === 0 ? 0 : messageEnds[i - 1], end)),
  );
}

/** Blocks as texts and tail symbols, counted by maps: the plain second count. */
function countsOf(messages: number[][], n: number) {
  const blocks = new Map<string, number>();
  const tails = new Map<number, number>();
  for (const message of messages) {
    const whole = message.length - (message.length % n);
    for (let at = 0; at < whole; at += n) {
      const key = message.slice(at, at + n).join(' ');
      blocks.set(key, (blocks.get(key) ?? 0) + 1);
    }
    for (const symbol of message.slice(whole)) tails.set(symbol, (tails.get(symbol) ?? 0) + 1);
  }
  return { blocks, tails };
}

function entropyBits(counts: Iterable<number>): number {
  const list = [...counts];
  const total = list.reduce((a, b) => a + b, 0);
  return list.reduce((bits, count) => bits + count * Math.log2(total / count), 0);
}

const drawn = fc
  .record({ m: fc.constantFrom(1, 2, 3, 256, 5000), n: fc.integer({ min: 1, max: 4 }) })
  .filter(({ m, n }) => m ** n < 2 ** 53)
  .chain(({ m, n }) => fc.record({ n: fc.constant(n), sequence: sequences(m) }));

describe('block-huffman, sent', () => {
  it('writes the sums of merged weights of blocks and of tails, for the unit and for each message', () => {
    fc.assert(
      fc.property(drawn, ({ n, sequence }) => {
        const coder = coderOf(n);
        const { alphabetSize } = sequence;
        const cost = (messages: number[][]) => {
          const { blocks, tails } = countsOf(messages, n);
          return sumOfMergedWeights(blocks.values()) + sumOfMergedWeights(tails.values());
        };
        const unit = setupOf({ alphabetSize, reset: 'never' });
        const whole = encode(coder, { ...unit, tables: train(coder, unit, [sequence]) }, [
          sequence,
        ]);
        const messages = messagesOf(sequence);
        expect(BigInt(whole.account.writtenBits)).toBe(cost(messages));
        const each = encode(coder, setupOf({ alphabetSize }), [sequence]);
        const sum = messages.reduce((total, message) => total + cost([message]), 0n);
        expect(BigInt(each.account.writtenBits)).toBe(sum);
        expect(each.payloadBits).toBe(each.account.writtenBits);
      }),
    );
  });

  it('prices blocks and tails by their frequencies; fit is that of the whole', () => {
    fc.assert(
      fc.property(drawn, ({ n, sequence }) => {
        const coder = coderOf(n);
        const { alphabetSize } = sequence;
        const ideal = (messages: number[][]) => {
          const { blocks, tails } = countsOf(messages, n);
          return entropyBits(blocks.values()) + entropyBits(tails.values());
        };
        const messages = messagesOf(sequence);
        const unit = setupOf({ alphabetSize, reset: 'never' });
        const whole = coder.price!(sequence, {
          ...unit,
          tables: train(coder, unit, [sequence]),
        });
        expect(whole.idealBits).toBeCloseTo(ideal(messages), 5);
        expect(whole.fit?.bits).toBeCloseTo(ideal(messages), 5);
        expect(whole.fit?.of).toEqual({ block: n });
        const each = coder.price!(sequence, setupOf({ alphabetSize }));
        for (const [i, message] of messages.entries())
          expect(each.messageIdealBits[i]).toBeCloseTo(ideal([message]), 5);
        expect(each.fit?.bits).toBeCloseTo(ideal(messages), 5);
      }),
    );
  });

  it('codes a dyadic source of blocks at exactly its entropy', () => {
    // Blocks 00 01 10 11 with probabilities 1/2 1/4 1/8 1/8: 1.75 bits a block.
    const message = [4, 2, 1, 1].flatMap((count, block) =>
      Array(count)
        .fill([block >> 1, block & 1])
        .flat(),
    );
    const coded = encode(coderOf(2), setupOf({ alphabetSize: 2 }), [sequenceOf(2, [message])]);
    expect(coded.payloadBits).toBe(14);
    const price = coderOf(2).price!(sequenceOf(2, [message]), setupOf({ alphabetSize: 2 }));
    expect(price.idealBits).toBe(14);
  });

  it('sends the second table only when a message has last symbols, and no table for no symbols', () => {
    const coder = coderOf(3);
    const tableBits = (messages: number[][], reset: Setup['reset']) => {
      const sequence = sequenceOf(256, messages);
      const setup = setupOf({ reset });
      const tables = train(coder, setup, [sequence]);
      const coded = encode(coder, reset === 'never' ? { ...setup, tables } : setup, [sequence]);
      const starts = [0, ...coded.messageEndsBits];
      const sizes = Array.from(coded.messageEndsBits, (end, i) => end - starts[i]);
      return { bits: coded.account.tableBits, sizes };
    };
    for (const reset of ['message', 'never'] as const) {
      const whole = tableBits([[1, 2, 3]], reset).bits;
      const tail = tableBits([[9]], reset).bits;
      expect(whole).toBeGreaterThan(0);
      expect(tail).toBeGreaterThan(0);
      expect(tableBits([[1, 2, 3, 9]], reset).bits).toBe(whole + tail);
      expect(tableBits([[1, 2, 3, 1, 2, 3]], reset).bits).toBe(whole);
      expect(tableBits([[]], reset)).toEqual({ bits: 0, sizes: [0] });
    }
    // Under `never` each in the first message that needs it: all words here are empty, so sizes are
    // tables.
    const { bits, sizes } = tableBits([[], [9], [1, 2, 3], [1, 2, 3, 9], [9]], 'never');
    expect(sizes[1] + sizes[2]).toBe(bits);
    expect(sizes.filter((size) => size > 0).length).toBe(2);
  });

  it('takes 0 payload bits where only one symbol exists', () => {
    for (const n of [1, 2, 3, 4]) {
      const sequence = oneMessage(new Uint8Array(103), 1);
      const sent = encode(coderOf(n), setupOf({ alphabetSize: 1 }), [sequence]);
      expect(sent.payloadBits).toBe(0);
      const setup = setupOf({ alphabetSize: 1, policy: 'shipped' });
      for (const trained of [sequence, sequenceOf(1, [])]) {
        const tables = train(coderOf(n), setup, [trained]);
        const coded = encode(coderOf(n), { ...setup, tables }, [sequence]);
        expect(coded.messageEndsBits[0]).toBe(0);
        expect(coderOf(n).price!(sequence, { ...setup, tables }).idealBits).toBe(0);
      }
    }
  });

  it('refuses blocks that its tables were not fitted to', () => {
    const setup = setupOf({ reset: 'never' });
    const tables = train(coderOf(2), setup, [sequenceOf(256, [[1, 2, 3, 4]])]);
    const encoder = coderOf(2).encoder({ ...setup, tables });
    expect(() => encoder.push(sequenceOf(256, [[1, 3]]))).toThrow(PromiseError);
  });

  it('carries pairs of 16-bit symbols by a sparse table', () => {
    const next = integers(21);
    const symbols = Uint16Array.from({ length: 60_001 }, () => next() & 0xffff);
    const sequence = oneMessage(symbols, 65536);
    const setup = setupOf({ alphabetSize: 65536, reset: 'never', lengths: 'sent' });
    const tables = train(coderOf(2), setup, [sequence]);
    const coded = encode(coderOf(2), { ...setup, tables }, [sequence]);
    const input = inputOf(setup, coded, sequence);
    expect(decode(coderOf(2), setup, input, symbols.length).sequence.symbols).toEqual(symbols);
    // 30 000 blocks from 2^32 one by one take at least log2 of the number of such sets: about 30
    // 000 (log2(2^32/30 000) + log2 e).
    const leastBits = 30_000 * (Math.log2(2 ** 32 / 30_000) + Math.LOG2E);
    expect(coded.account.tableBits).toBeGreaterThan(leastBits * 0.99);
    expect(coded.account.tableBits).toBeLessThan(leastBits * 1.1);
  });
});

describe('block-huffman, shipped', () => {
  it('escapes with the weight of the blocks seen once: by hand', () => {
    // Blocks 01 three times, 22 once; so the escape weighs 1, and words are 0, 10 and 11.
    const setup = setupOf({ alphabetSize: 4, policy: 'shipped' });
    const coder = coderOf(2);
    const tables = train(coder, setup, [sequenceOf(4, [[0, 1, 0, 1, 0, 1, 2, 2]])]);
    const both = { ...setup, tables };
    const sequence = sequenceOf(4, [
      [0, 1, 3, 0],
      [2, 2],
    ]);
    const coded = encode(coder, both, [sequence]);
    // 0, escape 11 with 3 and 0 in two bits each; 10.
    expect(Array.from(coded.bytes)).toEqual([0b0_11_11_00_1, 0b0_0000000]);
    expect(Array.from(coded.messageEndsBits)).toEqual([7, 9]);
    expect(coded.payloadBits).toBe(9);
    const price = coder.price!(sequence, both);
    expect(price.messageIdealBits[0]).toBeCloseTo(Math.log2(5 / 3) + Math.log2(5) + 4, 12);
    expect(price.messageIdealBits[1]).toBeCloseTo(Math.log2(5), 12);
    expect(coder.describeTables!(tables, both)).toEqual([
      '2 of 16 blocks of 2 symbols seen in 4 counted, 1 of them once',
      '3 code words of 1 to 2 bits, at most 24 allowed',
      'any other block by an escape of 2 bits, then symbol by symbol',
    ]);
  });

  it('escapes everything, at no cost for the escape, where nothing was trained', () => {
    const setup = setupOf({ alphabetSize: 256, policy: 'shipped' });
    const tables = train(coderOf(2), setup, [sequenceOf(256, [])]);
    const both = { ...setup, tables };
    const sequence = sequenceOf(256, [[1, 2, 3, 4, 5]]);
    // Four raw bytes; the last symbol by the second code, 256 equal weights.
    expect(encode(coderOf(2), both, [sequence]).payloadBits).toBe(40);
    expect(coderOf(2).price!(sequence, both).idealBits).toBeCloseTo(40, 9);
  });

  it('has no escape where every possible block was seen', () => {
    const setup = setupOf({ alphabetSize: 2, policy: 'shipped' });
    const sequence = sequenceOf(2, [[0, 0, 0, 1, 1, 0, 1, 1]]);
    const tables = train(coderOf(2), setup, [sequence]);
    const both = { ...setup, tables };
    expect(encode(coderOf(2), both, [sequence]).payloadBits).toBe(8);
    expect(coderOf(2).price!(sequence, both).idealBits).toBe(8);
  });

  it('prices what it codes: seen blocks, escapes and tails', () => {
    fc.assert(
      fc.property(
        fc.constantFrom(2, 3, 40).chain((m) => fc.tuple(sequences(m), sequences(m))),
        fc.integer({ min: 1, max: 4 }),
        ([trained, coded], n) => {
          const m = trained.alphabetSize;
          const setup = setupOf({ alphabetSize: m, policy: 'shipped' });
          const tables = train(coderOf(n), setup, [trained]);
          const price = coderOf(n).price!(coded, { ...setup, tables });
          const { blocks, tails } = countsOf(messagesOf(trained), n);
          const once = [...blocks.values()].filter((count) => count === 1).length;
          const escapes = blocks.size === m ** n ? 0 : Math.max(1, once);
          const total = [...blocks.values()].reduce((a, b) => a + b, escapes);
          const tailTotal = [...tails.values()].reduce((a, b) => a + b, 0) + m / 2;
          for (const [i, message] of messagesOf(coded).entries()) {
            const own = countsOf([message], n);
            let bits = 0;
            for (const [key, times] of own.blocks) {
              const count = blocks.get(key);
              const one =
                count === undefined
                  ? Math.log2(total / escapes) + n * Math.log2(m)
                  : Math.log2(total / count);
              bits += times * one;
            }
            for (const [symbol, times] of own.tails)
              bits += times * Math.log2(tailTotal / ((tails.get(symbol) ?? 0) + 1 / 2));
            expect(price.messageIdealBits[i]).toBeCloseTo(bits, 5);
          }
        },
      ),
      { numRuns: 60 },
    );
  });
});

describe('what block-huffman is told', () => {
  it('n must be given, from 1 to 4', () => {
    for (const text of ['block-huffman', 'block-huffman:n=0', 'block-huffman:n=5'])
      expect(() => parseCandidate(text)).toThrow(InputError);
    expect(parseCandidate('block-huffman:n=2').id).toBe('block-huffman:n=2');
  });

  it('blocks must be countable below 2^53, and symbols must have words', () => {
    const check = (text: string, alphabetSize: number) =>
      parseCandidate(text).create().check!(setupOf({ alphabetSize }));
    check('block-huffman:n=3', 65536);
    check('block-huffman:n=4', 8192);
    expect(() => check('block-huffman:n=4', 65536)).toThrow(InputError);
    expect(() => check('block-huffman:n=4', 2 ** 14)).toThrow(InputError);
    check('block-huffman:n=1,maxbits=8', 256);
    expect(() => check('block-huffman:n=1,maxbits=8', 257)).toThrow(InputError);
    expect(() => coderOf(1).check!(setupOf({ policy: 'primed' }))).toThrow(InputError);
  });

  it('more blocks than words of maxbits are an input error that names maxbits', () => {
    const coder = parseCandidate('block-huffman:n=2,maxbits=4').create();
    const pairs = Array.from({ length: 17 }, (_, i) => [i >> 4, i & 15]);
    const sequence = sequenceOf(16, [pairs.flat()]);
    encode(coder, setupOf({ alphabetSize: 16 }), [sequenceOf(16, [pairs.slice(1).flat()])]);
    expect(() => encode(coder, setupOf({ alphabetSize: 16 }), [sequence])).toThrow(
      expect.objectContaining({
        name: 'InputError',
        where: expect.objectContaining({ advice: expect.stringContaining('maxbits') }),
      }),
    );
  });

  it('refuses tables of another n or alphabet, or none', () => {
    const setup = setupOf({ policy: 'shipped' });
    const tables = train(coderOf(2), setup, [sequenceOf(256, [[1, 2]])]);
    expect(() => coderOf(2).encoder(setup)).toThrow(BugError);
    expect(() => coderOf(3).encoder({ ...setup, tables })).toThrow(BugError);
    expect(() => coderOf(2).encoder({ ...setup, alphabetSize: 9, tables })).toThrow(BugError);
  });
});

describe('n-grams', () => {
  it('are counted as a map counts them, with or without hashing, and again after clearing', () => {
    const space = fc.constantFrom(1, 7, 65536, 2 ** 20, 2 ** 20 + 1, 2 ** 48, 2 ** 53 - 1);
    fc.assert(
      fc.property(space, fc.nat(), fc.nat({ max: 2000 }), (size, seed, count) => {
        const next = integers(seed);
        const index = new NgramIndex(size);
        for (let round = 0; round < 2; round++) {
          const expected = new Map<number, number>();
          for (let i = 0; i < count; i++) {
            const key =
              (next() % 2 === 0 ? next() % 50 : next() * 2 ** 21 + (next() >>> 11)) % size;
            expected.set(key, (expected.get(key) ?? 0) + 1);
            const entry = index.add(key);
            expect(index.keys[entry]).toBe(key);
          }
          expect(index.size).toBe(expected.size);
          expect(index.total).toBe(count);
          for (const [key, times] of expected) expect(index.counts[index.find(key)]).toBe(times);
          for (let i = 0; i < 20; i++) {
            const key = next() % size;
            if (!expected.has(key)) expect(index.find(key)).toBe(-1);
          }
          index.clear();
          for (const key of expected.keys()) expect(index.find(key)).toBe(-1);
        }
      }),
      { numRuns: 60 },
    );
  });

  it('are cut from the start of each message, whatever the pieces, and split back', () => {
    fc.assert(
      fc.property(drawn, fc.array(fc.nat(), { maxLength: 5 }), ({ n, sequence }, picks) => {
        const { symbols, alphabetSize } = sequence;
        const got: number[] = [];
        const cutter = new NgramCutter(n, alphabetSize, (keys, count) => {
          const back = new Uint32Array(n * count);
          expandKeys(keys, count, n, alphabetSize, back);
          for (const symbol of back) got.push(symbol);
        });
        const cuts = picks.map((pick) => pick % (symbols.length + 1)).sort((a, b) => a - b);
        let from = 0;
        for (const to of [...cuts, symbols.length]) {
          cutter.take(symbols, from, to);
          from = to;
        }
        cutter.flush();
        got.push(...cutter.tail.subarray(0, cutter.tailCount));
        expect(got).toEqual(Array.from(symbols));
        expect(cutter.tailCount).toBe(symbols.length % n);
      }),
    );
  });

  it('are numbered exactly', () => {
    expect(ngramSpace(65536, 3)).toBe(2 ** 48);
    expect(ngramSpace(8192, 4)).toBe(2 ** 52);
    expect(ngramSpace(3, 4)).toBe(81);
    expect(ngramSpace(1, 4)).toBe(1);
  });

  it('have a limit, kept at its edge, with advice', () => {
    const index = new NgramIndex(2 ** 40);
    for (let i = 0; i < MOST_NGRAMS; i++) index.add(i * 401);
    expect(index.add(401)).toBe(1);
    expect(() => index.add(2 ** 40 - 1)).toThrow(LimitError);
    expect(index.size).toBe(MOST_NGRAMS);
  });
});
