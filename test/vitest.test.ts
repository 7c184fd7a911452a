/** The matchers that a product's own tests use, as a product would: through `expect`. */
import { describe, expect, it } from 'vitest';
import '../src/vitest.ts';

const identity = {
  encode: (m: ArrayLike<number>) => Uint8Array.from(m),
  decode: (c: Uint8Array) => c,
};
const broken = { ...identity, decode: (c: Uint8Array) => c.subarray(1) };
const messages = [Uint8Array.of(1, 2, 3), Uint8Array.of(4)];
const fixed = { coder: 'fixed', lengths: 'known' } as const;

/** The text with which an expectation fails. */
async function failure(expectation: Promise<unknown>): Promise<string> {
  return expectation.then(
    () => 'passed',
    (error: Error) => error.message,
  );
}

describe('matchers', () => {
  it('hold all messages together to a number of bits', async () => {
    await expect(messages).toCodeWithin(32, fixed);
    await expect(messages).toCodeWithin(32, identity);
    await expect(messages).not.toCodeWithin(31, fixed);
    expect(await failure(expect(messages).toCodeWithin(31, fixed))).toMatch(
      /2 messages take 32 bits, limit 31 bits: 1 bits too many/,
    );
    expect(await failure(expect(messages).not.toCodeWithin(40, fixed))).toMatch(/8 bits to spare/);
  });

  it('hold each message, and name the longest', async () => {
    await expect(messages).toCodeEachWithin(24, fixed);
    expect(await failure(expect(messages).toCodeEachWithin(16, fixed))).toMatch(
      /message 0 takes 24 bits, limit 16 bits: 8 bits too many; 1 of 2 messages are over it/,
    );
    await expect([]).toCodeEachWithin(0, fixed);
  });

  it('hold a rate', async () => {
    await expect(messages).toReachRate(8, fixed);
    expect(await failure(expect(messages).toReachRate(7.9, identity))).toMatch(
      /the rate is 8 bits per symbol, limit 7.9/,
    );
  });

  it('hold a codec to giving back what it was given', async () => {
    await expect(messages).toRoundTrip(identity);
    await expect(messages).not.toRoundTrip(broken);
    expect(await failure(expect(messages).toRoundTrip(broken))).toMatch(
      /no rate: the decoder gave back another number of symbols \(message 0, expected 3, got 2\)/,
    );
  });

  it('never take a broken codec for one that needs more bits', async () => {
    expect(await failure(expect(messages).not.toCodeWithin(1, broken))).toMatch(/there is no rate/);
    expect(await failure(expect(messages).toCodeWithin(1000, broken))).toMatch(/there is no rate/);
    expect(await failure(expect(messages).toCodeWithin(1, { coder: 'hufman' }))).toMatch(
      /no coder named/,
    );
  });

  it('train where there is data to train on', async () => {
    const train = Array.from({ length: 50 }, () => Uint8Array.of(1, 1, 1, 2));
    await expect([Uint8Array.of(1, 1, 1, 2)]).toCodeWithin(8, {
      coder: 'huffman',
      train,
      lengths: 'known',
    });
  });
});
