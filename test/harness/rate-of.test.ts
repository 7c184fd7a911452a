import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { memoryCorpus, sequenceOf } from '../../src/harness/memory-corpus.ts';
import { rateOfOwn } from '../../src/harness/own-codec.ts';
import { rateOf } from '../../src/harness/rate-of.ts';

const bytes = (text: string) => new TextEncoder().encode(text);

describe('the rate of data in memory', () => {
  it('is the sum of the code lengths, by hand', async () => {
    // Counts 4, 2, 1, 1: word lengths 1, 2, 3, 3, trained on the same counts; a byte's padding is off by align 1.
    const message = Uint8Array.of(0, 0, 0, 0, 1, 1, 2, 3);
    const train = { alphabetSize: 4, symbols: message, messageEnds: Uint32Array.of(8) };
    const rate = await rateOf(train, 'huffman', { train, lengths: 'known', align: 1 });
    expect(rate.tables).toBe('shipped');
    expect(rate.carriedBits).toBe(4 * 1 + 2 * 2 + 2 * 3);
    expect(rate.bitsPerSymbol).toBe(14 / 8);
  });

  it('counts every message, padded to the alignment', async () => {
    // Two symbols of 8 bits, and 3 and 0 of them: fixed width pays what it says, in whole 32-bit words.
    const rate = await rateOf(
      [Uint8Array.of(1, 2), Uint8Array.of(1, 2, 3), new Uint8Array()],
      'fixed',
      {
        lengths: 'known',
        align: 32,
      },
    );
    expect([...rate.messageBits]).toEqual([32, 32, 0]);
    expect(rate.carriedBits).toBe(64);
    expect(rate.messageCount).toBe(3);
  });

  it('grows under no policy but the one asked for', async () => {
    const data = [bytes('supply -18.2'), bytes('supply -18.4')];
    expect((await rateOf(data, 'arith:order=0')).tables).toBe('learned');
    expect((await rateOf(data, 'huffman')).tables).toBe('sent');
    expect((await rateOf(data, 'deflate')).tables).toBe('none');
    expect((await rateOf(data, 'arith:order=0', { tables: 'primed', train: data })).tables).toBe(
      'primed',
    );
  });

  it('fills messages to a budget', async () => {
    // Units of 4 bytes at 8 bits each, 64 bits a message, the count implied or paid: never more than fit.
    const units = Array.from({ length: 20 }, (_, i) => Uint8Array.of(i, i, i, i));
    const rate = await rateOf(units, 'fixed', { fillBytes: 16, lengths: 'known', align: 8 });
    expect(rate.messageCount).toBe(5);
    expect([...rate.messageEnds]).toEqual([16, 32, 48, 64, 80]);
  });

  it('refuses what makes no sense, for the reader', async () => {
    await expect(rateOf(bytes('a'), 'huffman', { tables: 'shipped' })).rejects.toThrow(
      /need data to train/,
    );
    await expect(rateOf(bytes('a'), 'hufman')).rejects.toThrow(/no coder named/);
    await expect(rateOf(bytes('a'), 'huffman', { tables: 'learned' })).rejects.toThrow(
      /has no cell/,
    );
    const other = { alphabetSize: 4, symbols: Uint8Array.of(1), messageEnds: Uint32Array.of(1) };
    expect(() => memoryCorpus('a', bytes('a'), { train: other })).toThrow(/different alphabets/);
    expect(() => sequenceOf({ ...other, symbols: Uint8Array.of(4) })).toThrow(
      /outside the alphabet/,
    );
    expect(() => sequenceOf({ ...other, messageEnds: Uint32Array.of(1, 0) })).toThrow(/fall/);
    expect(() => sequenceOf({ ...other, messageEnds: Uint32Array.of(0) })).toThrow(/do not cover/);
  });

  it('joins messages without changing a byte', () => {
    fc.assert(
      fc.property(fc.array(fc.uint8Array({ maxLength: 20 }), { maxLength: 20 }), (messages) => {
        const { symbols, messageEnds } = sequenceOf(messages);
        let from = 0;
        messages.forEach((message, i) => {
          expect([...symbols.subarray(from, messageEnds[i])]).toEqual([...message]);
          from = messageEnds[i];
        });
        expect(from).toBe(symbols.length);
      }),
    );
  });
});

describe('a product’s own codec', () => {
  const identity = {
    encode: (m: ArrayLike<number>) => Uint8Array.from(m),
    decode: (c: Uint8Array) => c,
  };

  it('counts whole bytes of every message', async () => {
    const rate = await rateOfOwn([Uint8Array.of(1, 2, 3), new Uint8Array()], identity);
    expect([...rate.messageBits]).toEqual([24, 0]);
    expect(rate.bitsPerSymbol).toBe(8);
  });

  it('has no rate where a decode differs', async () => {
    const cut = { ...identity, decode: (c: Uint8Array) => c.subarray(1) };
    await expect(rateOfOwn(Uint8Array.of(1, 2), cut)).rejects.toThrow(/another number of symbols/);
    const wrong = { ...identity, decode: (c: Uint8Array) => c.map((v) => v ^ 1) };
    await expect(rateOfOwn(Uint8Array.of(1, 2), wrong)).rejects.toThrow(/another symbol/);
  });

  it('cannot look at the message while it decodes, nor change it while it encodes', async () => {
    const held: Uint8Array[] = [];
    const sly = {
      encode: (m: ArrayLike<number> & { fill?(v: number): unknown }) => {
        const coded = Uint8Array.from(m);
        m.fill?.(0);
        held.push(coded);
        return coded;
      },
      decode: (c: Uint8Array) => Uint8Array.from(c),
    };
    expect((await rateOfOwn(Uint8Array.of(7, 8), sly)).carriedBits).toBe(16);
  });
});
