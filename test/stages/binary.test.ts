import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { CorruptStreamError } from '../../src/errors/errors.ts';
import { BinaryDecoder } from '../../src/stages/binary-decoder.ts';
import { BinaryEncoder } from '../../src/stages/binary-encoder.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';

type Decision = readonly [bit: number, ones: number];

const decisions = fc.array(
  fc.tuple(
    fc.nat({ max: 1 }),
    fc.oneof(fc.integer({ min: 1, max: 65_535 }), fc.constantFrom(1, 32_768, 65_535)),
  ),
  { maxLength: 200 },
);
const continuations = fc.constantFrom<'zeros' | 'any'>('zeros', 'any');

function code(writer: BitWriter, message: readonly Decision[], continuation: 'zeros' | 'any') {
  const stage = new BinaryEncoder(writer);
  stage.begin();
  for (const [bit, ones] of message) stage.put(bit, ones);
  stage.end(continuation);
  return stage;
}

const idealBits = (message: readonly Decision[]): number =>
  message.reduce(
    (sum, [bit, ones]) => sum - Math.log2((bit === 1 ? ones : 65_536 - ones) / 65_536),
    0,
  );

describe('the binary stage', () => {
  it('gives back several messages at any bit position, each with what follows it', () => {
    fc.assert(
      fc.property(
        fc.array(decisions, { minLength: 1, maxLength: 4 }),
        continuations,
        fc.nat({ max: 7 }),
        (messages, continuation, skew) => {
          const writer = new BitWriter();
          writer.writeBits(0, skew);
          const ends = messages.map((message) => {
            const before = writer.position;
            const stage = code(writer, message, continuation);
            expect(writer.position - before).toBe(stage.writtenBits + stage.endingBits);
            const ends = stage.writtenBits + stage.endingBits - stage.payloadBits;
            // Ends that straddle a leading byte's step can leave up to 32 bits of payload unshifted, which one carry-free
            // ending may save.
            expect(ends).toBeGreaterThanOrEqual(-32);
            expect(ends).toBeLessThan(continuation === 'zeros' ? 1 : 2);
            return writer.position;
          });
          // Junk behind the last message must not matter where the message ends itself.
          writer.writeBits(0xabcdef, 24);
          const reader = new BitReader(writer.finish().bytes);
          reader.seek(skew);
          const stage = new BinaryDecoder(reader);
          messages.forEach((message, i) => {
            if (continuation === 'zeros') reader.limit = ends[i];
            stage.begin();
            for (const [bit, ones] of message) expect(stage.take(ones)).toBe(bit);
            expect(stage.end(continuation)).toBe(ends[i]);
            reader.limit = reader.bytes.length * 8;
            reader.seek(ends[i]);
          });
        },
      ),
    );
  });

  it('loses little over the ideal on a long message of skewed decisions', () => {
    const generator = new SeededGenerator(11);
    const message = Array.from({ length: 200_000 }, (): Decision => {
      const ones = generator.integer(1, 65_535);
      return [generator.integer(0, 65_535) < ones ? 1 : 0, ones];
    });
    const { payloadBits } = code(new BitWriter(), message, 'zeros');
    const ideal = idealBits(message);
    expect(payloadBits).toBeGreaterThan(ideal - 1);
    expect(payloadBits - ideal).toBeLessThan(200_000 * 1e-4);
  });

  it('writes nothing for nothing, and codes long certain runs in few bits', () => {
    for (const continuation of ['zeros', 'any'] as const) {
      const empty = code(new BitWriter(), [], continuation);
      expect([empty.writtenBits, empty.endingBits, empty.payloadBits]).toEqual([0, 0, 0]);
      for (const bit of [0, 1]) {
        const run = Array.from({ length: 100_000 }, (): Decision => [bit, bit === 1 ? 65_535 : 1]);
        expect(code(new BitWriter(), run, continuation).payloadBits).toBeLessThan(
          idealBits(run) + 1,
        );
      }
    }
  });

  it('meets damaged bytes with other bits or a typed error, and stops', () => {
    fc.assert(
      fc.property(
        fc.uint8Array({ maxLength: 40 }),
        fc.array(fc.integer({ min: 1, max: 65_535 }), { maxLength: 400 }),
        (bytes, probabilities) => {
          const stage = new BinaryDecoder(new BitReader(bytes));
          try {
            stage.begin();
            for (const ones of probabilities) expect([0, 1]).toContain(stage.take(ones));
          } catch (error) {
            expect(error).toBeInstanceOf(CorruptStreamError);
          }
        },
      ),
    );
  });

  it('refuses to decode on and on from a cut message', () => {
    const stage = new BinaryDecoder(new BitReader(new Uint8Array(1)));
    stage.begin();
    expect(() => {
      for (let i = 0; i < 100; i++) stage.take(32_768);
    }).toThrow(CorruptStreamError);
  });
});
