import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { RangeEncoder } from '../../src/stages/range-encoder.ts';
import type { RangeBits } from '../../src/stages/range-precision.ts';

type Interval = readonly [low: number, frequency: number, total: number];

/** Often at the upper end, where carries come from. */
const interval: fc.Arbitrary<Interval> = fc
  .tuple(fc.integer({ min: 2, max: 2 ** 16 }), fc.nat(), fc.nat(), fc.boolean())
  .map(([total, a, b, high]) => {
    const low = high ? total - 1 - (a % Math.min(3, total)) : a % total;
    return [Math.max(0, low), 1 + (b % (total - Math.max(0, low))), total];
  });
const intervals = fc.array(interval, { maxLength: 40 });

function put(stage: RangeEncoder, list: readonly Interval[]) {
  for (const [low, frequency, total] of list) stage.put(low, frequency, total);
}

/** What the stage gives of these intervals alone, behind three bits. */
function alone(bits: RangeBits, list: readonly Interval[], continuation: 'zeros' | 'any') {
  const writer = new BitWriter();
  writer.writeBits(5, 3);
  const stage = new RangeEncoder(writer, bits);
  stage.begin();
  put(stage, list);
  stage.end(continuation);
  const { writtenBits, endingBits, payloadBits } = stage;
  return { ...writer.finish(), writtenBits, endingBits, payloadBits };
}

describe('a message taken back to a mark', () => {
  it('ends as if nothing had followed, whatever carries there were', () => {
    let carried = 0;
    fc.assert(
      fc.property(
        fc.constantFrom<RangeBits>(32, 48),
        fc.constantFrom<'zeros' | 'any'>('zeros', 'any'),
        intervals,
        intervals,
        intervals,
        (bits, continuation, forgotten, kept, undone) => {
          const writer = new BitWriter();
          const stage = new RangeEncoder(writer, bits);
          // A message that is begun and never ended leaves nothing.
          stage.beginApart();
          put(stage, forgotten);
          stage.beginApart();
          put(stage, kept.slice(0, kept.length >> 1));
          stage.mark();
          put(stage, kept.slice(kept.length >> 1));
          stage.mark();
          const before = stage.state().shifted;
          const expectedBits = stage.bitsIfEnded(continuation);
          put(stage, undone);
          const after = stage.state().shifted.subarray(0, before.length);
          if (Buffer.compare(before, after) !== 0) carried++;
          stage.restore();
          writer.writeBits(5, 3);
          stage.end(continuation);
          const { writtenBits, endingBits, payloadBits } = stage;
          const expected = alone(bits, kept, continuation);
          expect(writtenBits + endingBits).toBe(expectedBits);
          expect({ ...writer.finish(), writtenBits, endingBits, payloadBits }).toEqual(expected);
        },
      ),
      { seed: 20_261_203, numRuns: 1500 },
    );
    expect(carried, 'runs in which a carry passed the mark').toBeGreaterThan(20);
  });
});
