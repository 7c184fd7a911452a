import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { RangeEncoder } from '../../src/stages/range-encoder.ts';

interface Interval {
  readonly low: number;
  readonly frequency: number;
  readonly total: number;
}

/** Intervals at the upper end of narrow ranges among them, which is where carries run through many bytes. */
const intervals = fc.array(
  fc.oneof(
    fc
      .tuple(fc.integer({ min: 2, max: 2 ** 22 }), fc.double({ min: 0, max: 1, noNaN: true }))
      .map(([total, share]): Interval => {
        const low = Math.min(total - 1, Math.floor(share * total));
        return { low, frequency: 1, total };
      }),
    fc.constant<Interval>({ low: 2 ** 22 - 1, frequency: 1, total: 2 ** 22 }),
    fc.constant<Interval>({ low: 255, frequency: 1, total: 256 }),
    fc.constant<Interval>({ low: 1, frequency: 2, total: 3 }),
  ),
  { maxLength: 300 },
);

function encode(
  given: readonly Interval[],
  leadBits: number,
  ending: 'zeros' | 'any',
  bits: 32 | 48,
  settles?: readonly boolean[],
): { bytes: Uint8Array; booked: number[] } {
  const parts: Uint8Array[] = [];
  const writer =
    settles === undefined ? new BitWriter() : new BitWriter(16, (b) => parts.push(b.slice()));
  writer.writeBits(0, leadBits);
  const stage = new RangeEncoder(writer, bits);
  stage.begin();
  given.forEach(({ low, frequency, total }, i) => {
    stage.put(low, frequency, total);
    if (settles?.[i % settles.length]) stage.settle();
  });
  stage.end(ending);
  const booked = [stage.writtenBits, stage.endingBits, stage.payloadBits, writer.position];
  const { bytes } = writer.finish();
  return { bytes: settles === undefined ? bytes : Buffer.concat(parts), booked };
}

describe('settling bytes of an open message', () => {
  test('changes neither the bytes nor what is booked, wherever it is done', () => {
    fc.assert(
      fc.property(
        intervals,
        fc.constantFrom(0, 1, 7, 8),
        fc.constantFrom<'zeros' | 'any'>('zeros', 'any'),
        fc.constantFrom<32 | 48>(32, 48),
        fc.array(fc.boolean(), { minLength: 1, maxLength: 7 }),
        (given, leadBits, ending, bits, settles) => {
          const whole = encode(given, leadBits, ending, bits);
          const settled = encode(given, leadBits, ending, bits, settles);
          expect(Buffer.from(settled.bytes)).toEqual(Buffer.from(whole.bytes));
          expect(settled.booked).toEqual(whole.booked);
        },
      ),
      { numRuns: 600 },
    );
  });
});
