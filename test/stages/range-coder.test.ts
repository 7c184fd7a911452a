import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { CorruptStreamError } from '../../src/errors/errors.ts';
import { LARGEST_TOTAL } from '../../src/models/interval.ts';
import { Meter } from '../../src/stages/meter.ts';
import { RangeDecoder } from '../../src/stages/range-decoder.ts';
import { RangeEncoder } from '../../src/stages/range-encoder.ts';
import {
  endingByZeros,
  endingForAny,
  type RangeBits,
  rangePrecision,
} from '../../src/stages/range-precision.ts';

interface Interval {
  readonly low: number;
  readonly frequency: number;
  readonly total: number;
}

const totals = fc.oneof(
  fc.constantFrom(2, 3, 255, 256, 257, 2 ** 16, LARGEST_TOTAL - 1, LARGEST_TOTAL),
  fc.integer({ min: 2, max: LARGEST_TOTAL }),
);
const intervals: fc.Arbitrary<Interval> = totals.chain((total) =>
  fc
    .oneof(fc.integer({ min: 1, max: total - 1 }), fc.constantFrom(1, total - 1))
    .chain((frequency) =>
      fc
        .oneof(
          fc.integer({ min: 0, max: total - frequency }),
          fc.constantFrom(0, total - frequency),
        )
        .map((low) => ({ low, frequency, total })),
    ),
);
const messages = fc.array(fc.array(intervals, { maxLength: 40 }), { minLength: 1, maxLength: 6 });
const widths = fc.constantFrom<RangeBits>(32, 48);

/** Codes messages after `offset` bits; gives the bytes and where each message ends. */
function encode(
  list: Interval[][],
  bits: RangeBits,
  offset: number,
  continuation: 'zeros' | 'any',
) {
  const writer = new BitWriter();
  writer.writeRun(1, offset);
  const encoder = new RangeEncoder(writer, bits);
  const meter = new Meter();
  const ends = list.map((message) => {
    const start = writer.position;
    encoder.begin();
    for (const { low, frequency, total } of message) {
      encoder.put(low, frequency, total);
      meter.put(low, frequency, total);
    }
    encoder.end(continuation);
    expect(writer.position - start).toBe(encoder.writtenBits + encoder.endingBits);
    // Bounds of the ending, by theory: −8 … 1 with a known end, 0 … 2 with none.
    const over = encoder.writtenBits + encoder.endingBits - encoder.payloadBits;
    expect(over).toBeGreaterThanOrEqual(continuation === 'zeros' ? -8 : 0);
    expect(over).toBeLessThan(continuation === 'zeros' ? 1 : 2);
    const ideal = meter.takeBits();
    expect(encoder.payloadBits).toBeGreaterThanOrEqual(ideal - 1e-9);
    if (message.length === 0) expect(writer.position).toBe(start);
    return writer.position;
  });
  return { ends, bytes: writer.finish().bytes };
}

function decodeMessage(decoder: RangeDecoder, message: Interval[], continuation: 'zeros' | 'any') {
  decoder.begin();
  for (const { low, frequency, total } of message) {
    const target = decoder.target(total);
    expect(target).toBeGreaterThanOrEqual(low);
    expect(target).toBeLessThan(low + frequency);
    decoder.take(low, frequency);
  }
  return decoder.end(continuation);
}

describe('range encoder and decoder', () => {
  it('give back messages at any bit position, with their ends known', () => {
    fc.assert(
      fc.property(messages, widths, fc.nat(9), (list, bits, offset) => {
        const { bytes, ends } = encode(list, bits, offset, 'zeros');
        const reader = new BitReader(bytes);
        reader.seek(offset);
        const decoder = new RangeDecoder(reader, bits);
        list.forEach((message, i) => {
          reader.setLimit(ends[i]);
          expect(decodeMessage(decoder, message, 'zeros')).toBe(ends[i]);
          reader.seek(ends[i]);
        });
      }),
      { numRuns: 300, seed: 31 },
    );
  });

  it('find the end themselves, whatever follows', () => {
    fc.assert(
      fc.property(
        messages,
        widths,
        fc.nat(9),
        fc.uint8Array({ maxLength: 9 }),
        (list, bits, offset, junk) => {
          const { bytes, ends } = encode(list, bits, offset, 'any');
          const end = ends[ends.length - 1];
          const longer = new Uint8Array(bytes.length + junk.length);
          longer.set(bytes);
          longer.set(junk, bytes.length);
          if (end % 8 !== 0 && junk.length > 0)
            longer[bytes.length - 1] |= junk[0] & (0xff >>> (end % 8));
          const reader = new BitReader(longer);
          reader.seek(offset);
          const decoder = new RangeDecoder(reader, bits);
          list.forEach((message, i) => {
            const got = decodeMessage(decoder, message, 'any');
            expect(got).toBe(ends[i]);
            reader.seek(got);
          });
        },
      ),
      { numRuns: 300, seed: 32 },
    );
  });

  /** Intervals that keep one half of the initial interval strictly inside, by choosing each after the encoder's state. */
  function astrideOneHalf(bits: RangeBits, count: number): Interval[] {
    const { top, initialRange } = rangePrecision(bits);
    const encoder = new RangeEncoder(new BitWriter(), bits);
    encoder.begin();
    let distance = top / 2;
    let range = initialRange;
    const message: Interval[] = [];
    for (let shifted = 0; message.length < count; ) {
      const fits = (total: number) => {
        const step = Math.floor(range / total);
        return distance % step > 0 && distance < step * total;
      };
      const total = [3, 4, 5, 6, 7].find(fits)!;
      const step = Math.floor(range / total);
      const interval = { low: Math.floor(distance / step), frequency: 1, total };
      encoder.put(interval.low, 1, total);
      message.push(interval);
      const state = encoder.state();
      distance = (distance % step) * 256 ** (state.shifted.length - shifted);
      shifted = state.shifted.length;
      range = state.range;
    }
    // One half is 127, 255, 255 … from below, and 128, 0, 0 … from above.
    expect(encoder.state().shifted.filter((byte) => byte === 255).length).toBeGreaterThan(60);
    return message;
  }

  it('carry through long runs of 255', () => {
    for (const bits of [32, 48] as RangeBits[]) {
      const astride = astrideOneHalf(bits, 400);
      for (const low of [0, 999]) {
        const message = [...astride, { low, frequency: 1, total: 1000 }];
        const { bytes, ends } = encode([message, message], bits, 3, 'zeros');
        // 127 or 128 behind the three bits before, as the last step decided.
        expect(((bytes[0] << 3) | (bytes[1] >> 5)) & 0xff).toBe(low === 0 ? 127 : 128);
        const reader = new BitReader(bytes);
        reader.seek(3);
        const decoder = new RangeDecoder(reader, bits);
        for (const end of ends) {
          reader.setLimit(end);
          expect(decodeMessage(decoder, message, 'zeros')).toBe(end);
          reader.seek(end);
        }
      }
    }
  });

  it('refuse bytes that end too early, and values outside every interval', () => {
    const message = Array.from({ length: 100 }, () => ({ low: 17, frequency: 1, total: 256 }));
    const { bytes } = encode([message], 48, 0, 'zeros');
    const cut = new RangeDecoder(new BitReader(bytes.subarray(0, 50)), 48);
    cut.begin();
    expect(() => {
      for (let i = 0; i < message.length; i++) cut.take(cut.target(256), 1);
    }).toThrow(CorruptStreamError);
    const outside = new RangeDecoder(new BitReader(new Uint8Array(9).fill(255)), 32);
    outside.begin();
    expect(() => outside.target(2 ** 22)).toThrow(CorruptStreamError);
  });
});

describe('the ending of a code string', () => {
  const states = widths.chain((bits) => {
    const { top, shiftBelow, initialRange } = rangePrecision(bits);
    return fc
      .record({
        low: fc.oneof(
          fc.maxSafeNat().map((v) => v % top),
          fc.constantFrom(0, 1, top - 1),
        ),
        range: fc.oneof(
          fc.maxSafeNat().map((v) => shiftBelow + (v % (initialRange - shiftBelow))),
          fc.constantFrom(shiftBelow, initialRange - 1),
        ),
      })
      .map((state) => ({ bits, ...state }));
  });

  it('is the shortest there is, by trying every length', () => {
    fc.assert(
      fc.property(states, ({ bits, low, range }) => {
        const precision = rangePrecision(bits);
        const end = low + range;
        let byZeros = 0;
        while (Math.ceil(low / 2 ** (bits - byZeros)) * 2 ** (bits - byZeros) >= end) byZeros++;
        expect(endingByZeros(precision, low, range)).toBe(byZeros);
        let forAny = 0;
        for (; ; forAny++) {
          const unit = 2 ** (bits - forAny);
          if (Math.ceil(low / unit) * unit + unit <= end) break;
        }
        expect(endingForAny(precision, low, range)).toBe(forAny);
      }),
      { numRuns: 2000, seed: 33 },
    );
  });
});

describe('precision', () => {
  /** payload − ideal, in bits, of `count` intervals drawn from a fixed sequence. */
  function lossBits(
    bits: RangeBits,
    count: number,
    frequencyOf: (i: number) => number,
    total: number,
  ) {
    const encoder = new RangeEncoder(new BitWriter(), bits);
    const meter = new Meter();
    encoder.begin();
    for (let i = 0; i < count; i++) {
      const frequency = frequencyOf(i);
      const low = (i * 7919) % (total - frequency + 1);
      encoder.put(low, frequency, total);
      meter.put(low, frequency, total);
    }
    encoder.end('zeros');
    return encoder.payloadBits - meter.takeBits();
  }

  const count = 300_000;
  const cases: [string, (i: number) => number, number][] = [
    ['nearly certain', () => LARGEST_TOTAL - 1, LARGEST_TOTAL],
    ['rare', () => 1, LARGEST_TOTAL - 1],
    ['one in a thousand', (i) => (i % 1000 === 0 ? 4194 : LARGEST_TOTAL - 4194), LARGEST_TOTAL],
    ['spread', (i) => 1 + ((i * 104729) % 60000), 2 ** 21 + 12345],
  ];

  it.each(cases)(
    'of 48 bits costs at most 6 bits in a million intervals: %s',
    (_, frequency, total) => {
      expect(lossBits(48, count, frequency, total)).toBeLessThanOrEqual((6 * count) / 1e6);
    },
  );

  it.each(cases)('of 32 bits costs at most 1.61 · n · T / 2^24: %s', (_, frequency, total) => {
    expect(lossBits(32, count, frequency, total)).toBeLessThanOrEqual(
      (1.61 * count * total) / 2 ** 24,
    );
  });
});

describe('Meter', () => {
  it('adds up exactly what logarithms one by one give', () => {
    fc.assert(
      fc.property(fc.array(intervals, { maxLength: 300 }), (list) => {
        const meter = new Meter();
        let expected = 0;
        for (const { low, frequency, total } of list) {
          meter.put(low, frequency, total);
          expected += Math.log2(total) - Math.log2(frequency);
        }
        expect(Math.abs(meter.takeBits() - expected)).toBeLessThanOrEqual(1e-12 * expected + 1e-12);
        expect(meter.takeBits()).toBe(0);
      }),
      { numRuns: 100, seed: 34 },
    );
  });
});
