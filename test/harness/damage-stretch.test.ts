import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Coded } from '../../src/coders/contract.ts';
import {
  type Arrived,
  byteCountOf,
  inputOf,
  messageStretch,
  type Stretch,
  unharmed,
  withFlips,
  withoutBytes,
  withoutMessages,
} from '../../src/harness/damage-stretch.ts';
import type { CodedUnit } from '../../src/harness/run-cell.ts';

/** Messages as strings of bits: the second way, without any arithmetic of positions. */
const messagesOfBits = fc.array(
  fc.array(fc.constantFrom('0', '1'), { maxLength: 30 }).map((bits) => bits.join('')),
  { minLength: 1, maxLength: 6 },
);

function bytesOf(bits: string): Uint8Array {
  const padded = bits.padEnd(Math.ceil(bits.length / 8) * 8, '0');
  return Uint8Array.from(padded.match(/.{8}/g) ?? [], (byte) => Number.parseInt(byte, 2));
}

function stretchOf(messages: readonly string[]): Stretch {
  let bits = 0;
  const messageEndsBits = Float64Array.from(messages, (m) => {
    bits += m.length;
    return bits;
  });
  // A symbol a message, so that counts show which is which.
  const counts = messages.map((_, i) => i + 1);
  const messageEnds = Uint32Array.from(counts, (_, i) => ((i + 1) * (i + 2)) / 2);
  const symbols = new Uint8Array(messageEnds[messageEnds.length - 1]);
  return {
    bytes: bytesOf(messages.join('')),
    messageEndsBits,
    messages: { alphabetSize: 256, symbols, messageEnds },
  };
}

function messagesOf({ bytes, messageEndsBits }: Arrived): string[] {
  const text = [...bytes].map((byte) => byte.toString(2).padStart(8, '0')).join('');
  return [...messageEndsBits].map((end, i) =>
    text.slice(i === 0 ? 0 : messageEndsBits[i - 1], end),
  );
}

describe('damage to coded bits', () => {
  it('flips the bits of one message', () => {
    fc.assert(
      fc.property(messagesOfBits, fc.nat(), fc.array(fc.nat(), { maxLength: 4 }), (all, at, n) => {
        const index = at % all.length;
        const bits = all[index];
        const places = bits === '' ? [] : [...new Set(n.map((x) => x % bits.length))];
        const flipped = [...bits]
          .map((bit, i) => (places.includes(i) ? String(1 - Number(bit)) : bit))
          .join('');
        const stretch = stretchOf(all);
        const arrived = withFlips(stretch, index, places);
        expect(messagesOf(arrived)).toEqual(all.map((m, i) => (i === index ? flipped : m)));
        expect(messagesOf(unharmed(stretch))).toEqual(all);
        expect(arrived.symbolCounts).toEqual(Uint32Array.from(all, (_, i) => i + 1));
      }),
    );
  });

  it('takes bytes out of one message, and fills up to whole words where the link counts them', () => {
    fc.assert(
      fc.property(
        messagesOfBits,
        fc.nat(),
        fc.array(fc.nat(), { maxLength: 4 }),
        fc.constantFrom(1, 8, 16, 32),
        fc.constantFrom('link' as const, 'known' as const, 'sent' as const),
        (raw, at, n, align, lengths) => {
          const all = raw.map((m) => m.padEnd(Math.ceil(m.length / align) * align, '0'));
          const index = at % all.length;
          const bytes = all[index].match(/.{1,8}/g) ?? [];
          const places =
            bytes.length === 0
              ? []
              : [...new Set(n.map((x) => x % bytes.length))].sort((a, b) => a - b);
          const kept = bytes.filter((_, i) => !places.includes(i)).join('');
          const padded =
            lengths === 'link' ? kept.padEnd(Math.ceil(kept.length / align) * align, '0') : kept;
          const stretch = stretchOf(all);
          expect(byteCountOf(stretch, index)).toBe(bytes.length);
          const arrived = withoutBytes(stretch, index, places, lengths, align);
          expect(messagesOf(arrived)).toEqual(all.map((m, i) => (i === index ? padded : m)));
          expect(arrived.bytes.length).toBe(Math.ceil(arrived.messageEndsBits[all.length - 1] / 8));
        },
      ),
    );
  });

  it('takes whole messages out, with their counts', () => {
    fc.assert(
      fc.property(messagesOfBits, fc.nat(), fc.nat(), (all, a, b) => {
        const [from, to] = [a % (all.length + 1), b % (all.length + 1)].sort((x, y) => x - y);
        const left = <T>(_: T, i: number) => i < from || i >= to;
        const arrived = withoutMessages(stretchOf(all), from, to);
        expect(messagesOf(arrived)).toEqual(all.filter(left));
        expect([...arrived.symbolCounts]).toEqual(all.map((_, i) => i + 1).filter(left));
      }),
    );
  });

  it('cuts one message out, from its first bit', () => {
    fc.assert(
      fc.property(messagesOfBits, fc.nat(), (all, at) => {
        const index = at % all.length;
        const { bytes, messageEndsBits, messages } = stretchOf(all);
        const coded = { bytes, messageEndsBits } as Coded;
        const cut = messageStretch({ coded, messages } as CodedUnit, index);
        expect(messagesOf(unharmed(cut))).toEqual([all[index]]);
        expect([...cut.messages.messageEnds]).toEqual([index + 1]);
      }),
    );
  });

  it('gives a decoder no more than the lengths rule grants', () => {
    const arrived = unharmed(stretchOf(['10101010', '1']));
    expect(Object.keys(inputOf(arrived, 'sent'))).toEqual(['bytes', 'messageCount']);
    expect(inputOf(arrived, 'link')).toMatchObject({ messageEndsBits: Float64Array.of(8, 9) });
    expect(inputOf(arrived, 'link')).not.toHaveProperty('symbolCounts');
    expect(inputOf(arrived, 'known')).toMatchObject({ symbolCounts: Uint32Array.of(1, 2) });
    expect(inputOf(arrived, 'known')).not.toHaveProperty('messageEndsBits');
  });
});
