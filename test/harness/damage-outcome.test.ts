import { describe, expect, it } from 'vitest';
import { damageOutcome } from '../../src/harness/damage-outcome.ts';
import { newSymbolArray, type SymbolSequence } from '../../src/symbols/sequence.ts';

function sequence(messages: readonly (readonly number[])[], alphabetSize = 256): SymbolSequence {
  const symbols = newSymbolArray(alphabetSize, messages.flat().length);
  symbols.set(messages.flat());
  let end = 0;
  const messageEnds = Uint32Array.from(messages, (m) => {
    end += m.length;
    return end;
  });
  return { alphabetSize, symbols, messageEnds };
}

const SENT = sequence([
  [1, 2, 3, 4],
  [5, 6, 7, 8],
  [9, 10],
]);

describe('what damage did', () => {
  it('is nothing where all came out right', () => {
    expect(damageOutcome(SENT, SENT, { from: 1, to: 2 })).toEqual({
      verdict: 'harmless',
      symbolsLost: 0,
      recovery: 0,
      messagesAfter: 0,
    });
  });

  it('is counted place by place, from the first wrong to the last', () => {
    const got = sequence([
      [1, 2, 3, 4],
      [5, 0, 7, 0],
      [9, 10],
    ]);
    expect(damageOutcome(SENT, got, { from: 1, to: 2 })).toEqual({
      verdict: 'by_check',
      symbolsLost: 2,
      recovery: 3,
      messagesAfter: 0,
    });
  });

  it('goes on into later messages', () => {
    const got = sequence([
      [1, 2, 0, 4],
      [5, 6, 7, 8],
      [9, 0],
    ]);
    // Symbol 2 and symbol 9 are wrong; the message between them is right, and still no end of it.
    expect(damageOutcome(SENT, got, { from: 0, to: 1 })).toEqual({
      verdict: 'by_check',
      symbolsLost: 2,
      recovery: 8,
      messagesAfter: 2,
    });
  });

  it('loses all from the damaged message on where the decoder stopped', () => {
    expect(damageOutcome(SENT, undefined, { from: 1, to: 2 })).toEqual({
      verdict: 'detected',
      symbolsLost: 6,
      recovery: 6,
      messagesAfter: 1,
    });
  });

  it('counts symbols that are missing, and takes a message with too many for wrong', () => {
    const short = sequence([
      [1, 2, 3, 4],
      [5, 6],
      [9, 10],
    ]);
    expect(damageOutcome(SENT, short, { from: 1, to: 2 })).toMatchObject({
      verdict: 'by_check',
      symbolsLost: 2,
      recovery: 2,
    });
    const long = sequence([
      [1, 2, 3, 4],
      [5, 6, 7, 8, 8],
      [9, 10],
    ]);
    expect(damageOutcome(SENT, long, { from: 1, to: 2 })).toMatchObject({
      verdict: 'by_check',
      symbolsLost: 0,
      recovery: 1,
    });
  });

  it('passes a CRC-32 where the difference is a multiple of its polynomial', () => {
    // 0x104C11DB7 has 33 bits; the first goes into the low bit of the first byte (ISO-HDLC is reflected). Such a difference
    // adds nothing to the remainder, whatever it is added to.
    const polynomial = '100000100110000010001110110110111'.padEnd(40, '0');
    const difference = polynomial
      .match(/.{8}/g)!
      .map((byte) => Number.parseInt([...byte].reverse().join(''), 2));
    const bytes = [7, 99, 0, 255, 31, 1];
    const sent = sequence([bytes]);
    const missed = sequence([bytes.map((byte, i) => byte ^ (difference[i] ?? 0))]);
    expect(damageOutcome(sent, missed, { from: 0, to: 1 })).toMatchObject({
      verdict: 'undetected',
      symbolsLost: 5,
    });
    const seen = sequence([bytes.map((byte, i) => byte ^ (i === 1 ? 1 : 0))]);
    expect(damageOutcome(sent, seen, { from: 0, to: 1 }).verdict).toBe('by_check');
  });

  it('checks symbols wider than a byte by all their bytes', () => {
    const wide = sequence([[300, 4]], 1000);
    const other = sequence([[300 - 256, 4]], 1000);
    expect(damageOutcome(wide, other, { from: 0, to: 1 }).verdict).toBe('by_check');
  });

  it('is a gap that nobody sees where messages are missing and the others right', () => {
    const got = sequence([
      [1, 2, 3, 4],
      [9, 10],
    ]);
    expect(damageOutcome(SENT, got, { from: 1, to: 2, missing: true })).toEqual({
      verdict: 'undetected',
      symbolsLost: 4,
      recovery: 4,
      messagesAfter: 0,
    });
  });

  it('holds each message after a gap against its own', () => {
    const got = sequence([
      [5, 0, 7, 8],
      [9, 10],
    ]);
    expect(damageOutcome(SENT, got, { from: 0, to: 1, missing: true })).toEqual({
      verdict: 'by_check',
      symbolsLost: 5,
      recovery: 6,
      messagesAfter: 1,
    });
    expect(damageOutcome(SENT, undefined, { from: 0, to: 2, missing: true })).toEqual({
      verdict: 'detected',
      symbolsLost: 10,
      recovery: 10,
      messagesAfter: 1,
    });
  });
});
