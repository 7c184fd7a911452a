/**
 * Matchers for a product's own tests: `import 'bitassay/vitest'` in a test file or in vitest's set-up file adds them to
 * `expect`. What is held is bits, which are exact; each figure counts only because the decode gave the data back.
 */
import { expect, type MatcherState } from 'vitest';
import { BitassayError } from './errors/errors.ts';
import type { MessageData } from './harness/memory-corpus.ts';
import { type OwnCodec, type OwnRate, rateOfOwn } from './harness/own-codec.ts';
import { type RateOptions, rateOf } from './harness/rate-of.ts';

/** One of our candidates with how it is used, or a product's own codec. */
export type CodedBy = ({ readonly coder: string } & RateOptions) | OwnCodec;

interface Verdict {
  readonly pass: boolean;
  readonly message: () => string;
  readonly actual?: unknown;
  readonly expected?: unknown;
}

const bitsText = (bits: number): string => `${bits.toLocaleString('en-GB')} bits`;

/**
 * The rate, or the verdict that there is none because a decode differed or an encoder failed: a failure under `.not` too, so
 * that a broken codec never passes for one that takes more bits.
 */
async function measure(data: MessageData, by: CodedBy, isNot: boolean): Promise<OwnRate | Verdict> {
  try {
    if (!('coder' in by)) return await rateOfOwn(data, by);
    const { coder, ...options } = by;
    return await rateOf(data, coder, options);
  } catch (error) {
    if (!(error instanceof BitassayError)) throw error;
    const { messageIndex, symbolIndex, expected, got } = error.where;
    const place = [
      messageIndex === undefined ? '' : `message ${messageIndex}`,
      symbolIndex === undefined ? '' : `symbol ${symbolIndex}`,
      expected === undefined ? '' : `expected ${expected}`,
      got === undefined ? '' : `got ${got}`,
    ].filter((part) => part !== '');
    const text = `${error.message}${place.length === 0 ? '' : ` (${place.join(', ')})`}`;
    return { pass: isNot, message: () => `there is no rate: ${text}` };
  }
}

function limitVerdict(what: string, actual: number, limit: number, more = ''): Verdict {
  const pass = actual <= limit;
  const gap = pass
    ? `${bitsText(limit - actual)} to spare`
    : `${bitsText(actual - limit)} too many`;
  return {
    pass,
    message: () => `${what} ${bitsText(actual)}, limit ${bitsText(limit)}: ${gap}${more}`,
    actual,
    expected: limit,
  };
}

expect.extend({
  async toCodeWithin(
    this: MatcherState,
    data: MessageData,
    bits: number,
    by: CodedBy,
  ): Promise<Verdict> {
    const rate = await measure(data, by, this.isNot === true);
    if ('pass' in rate) return rate;
    return limitVerdict(`${rate.messageCount} messages take`, rate.carriedBits, bits);
  },
  async toCodeEachWithin(
    this: MatcherState,
    data: MessageData,
    bits: number,
    by: CodedBy,
  ): Promise<Verdict> {
    const rate = await measure(data, by, this.isNot === true);
    if ('pass' in rate) return rate;
    let worst = 0;
    rate.messageBits.forEach((value, i) => {
      if (value > rate.messageBits[worst]) worst = i;
    });
    const over = rate.messageBits.reduce((count, value) => count + (value > bits ? 1 : 0), 0);
    const more = over === 0 ? '' : `; ${over} of ${rate.messageCount} messages are over it`;
    return limitVerdict(`message ${worst} takes`, rate.messageBits[worst] ?? 0, bits, more);
  },
  async toReachRate(
    this: MatcherState,
    data: MessageData,
    bitsPerSymbol: number,
    by: CodedBy,
  ): Promise<Verdict> {
    const rate = await measure(data, by, this.isNot === true);
    if ('pass' in rate) return rate;
    const actual = rate.bitsPerSymbol;
    return {
      pass: actual <= bitsPerSymbol,
      message: () => `the rate is ${actual} bits per symbol, limit ${bitsPerSymbol}`,
      actual,
      expected: bitsPerSymbol,
    };
  },
  async toRoundTrip(data: MessageData, by: CodedBy): Promise<Verdict> {
    const rate = await measure(data, by, false);
    if ('pass' in rate) return rate;
    return {
      pass: true,
      message: () => `all ${rate.messageCount} messages came back, and were expected not to`,
    };
  },
});

interface BitassayMatchers<R> {
  /** All messages together take at most so many carried bits, and decode to what they were. */
  toCodeWithin(bits: number, by: CodedBy): Promise<R>;
  /** Each message takes at most so many carried bits. */
  toCodeEachWithin(bits: number, by: CodedBy): Promise<R>;
  /** Carried bits per source symbol are at most so many. */
  toReachRate(bitsPerSymbol: number, by: CodedBy): Promise<R>;
  /** Every message decodes to what it was. */
  toRoundTrip(by: CodedBy): Promise<R>;
}

declare module 'vitest' {
  // biome-ignore lint/suspicious/noExplicitAny: the parameter's name and default must repeat vitest's own
  interface Matchers<T = any> extends BitassayMatchers<T> {}
}
