import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { blockView } from '../../src/entropy/block-view.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';

function sequenceOf(
  messages: readonly (readonly number[])[],
  alphabetSize: number,
): SymbolSequence {
  let end = 0;
  const messageEnds = Uint32Array.from(messages, (message) => {
    end += message.length;
    return end;
  });
  const symbols = messages.flat();
  return {
    alphabetSize,
    messageEnds,
    symbols: alphabetSize <= 256 ? Uint8Array.from(symbols) : Uint32Array.from(symbols),
  };
}

/** Non-overlapping blocks, phase 0 in each message, as text. */
function blocksOf(messages: readonly (readonly number[])[], n: number): Map<string, number> {
  const counts = new Map<string, number>();
  for (const message of messages) {
    for (let at = 0; at + n <= message.length; at += n) {
      const block = message.slice(at, at + n).join();
      counts.set(block, (counts.get(block) ?? 0) + 1);
    }
  }
  return counts;
}

/** Bits of an optimal prefix code: the sum of merged weights, found by searching the two least again and again. */
function optimalBits(counts: readonly number[]): number {
  const weights = [...counts];
  let bits = 0;
  while (weights.length > 1) {
    weights.sort((a, b) => b - a);
    const merged = weights.pop()! + weights.pop()!;
    bits += merged;
    weights.push(merged);
  }
  return bits;
}

const messageLists = (largest: number) =>
  fc.array(fc.array(fc.nat(largest), { maxLength: 40 }), { maxLength: 6 });

describe('blockView', () => {
  it('counts what a map of blocks counts, and codes at the sum of merged weights', () => {
    const cases = fc.oneof(
      ...[0, 1, 3, 255].map((largest) => fc.tuple(messageLists(largest), fc.constant(largest + 1))),
      fc.tuple(messageLists(2 ** 32 - 1), fc.constant(2 ** 32)),
    );
    fc.assert(
      fc.property(cases, ([messages, alphabetSize]) => {
        const view = blockView(sequenceOf(messages, alphabetSize));
        const symbolCount = messages.flat().length;
        for (let n = 1; n <= 8; n++) {
          const counts = [...blocksOf(messages, n).values()];
          const blocks = counts.reduce((a, b) => a + b, 0);
          if (blocks === 0) {
            expect(view).toHaveLength(n - 1);
            break;
          }
          const entry = view[n - 1];
          const entropy = -counts.reduce((h, c) => h + (c / blocks) * Math.log2(c / blocks), 0);
          expect(entry).toMatchObject({
            n,
            blocks,
            distinct: counts.length,
            leftOut: symbolCount - n * blocks,
          });
          expect(entry.plugInPerSymbol).toBeCloseTo(entropy / n, 10);
          const term = (counts.length - 1) / (2 * blocks * Math.LN2);
          expect(entry.correctedPerSymbol).toBeCloseTo((entropy + term) / n, 10);
          expect(entry.huffmanPerSymbol).toBeCloseTo(optimalBits(counts) / (n * blocks), 12);
        }
      }),
    );
  });

  it('has H ≤ L/n < H + 1/n on the same blocks', () => {
    // C. E. Shannon 1948, §9, for the frequencies of the blocks themselves. The slack is that of sums of doubles.
    const cases = fc.oneof(...[0, 1, 2, 15].map(messageLists));
    fc.assert(
      fc.property(cases, (messages) => {
        for (const { n, plugInPerSymbol, huffmanPerSymbol } of blockView(
          sequenceOf(messages, 16),
        )) {
          expect(huffmanPerSymbol).toBeGreaterThanOrEqual(plugInPerSymbol - 1e-12);
          expect(huffmanPerSymbol).toBeLessThan(plugInPerSymbol + 1 / n);
        }
      }),
    );
  });

  it('costs nothing where there is one distinct block', () => {
    for (const entry of blockView(oneMessage(new Uint8Array(1000).fill(7), 256))) {
      expect(entry).toMatchObject({ distinct: 1, plugInPerSymbol: 0, huffmanPerSymbol: 0 });
      expect(entry.estimable).toBe(true);
    }
    for (const entry of blockView(oneMessage(new Uint8Array(80), 1))) {
      expect(entry.nsbPerSymbol).toBe(0);
    }
  });

  it('reaches a dyadic source exactly', () => {
    // Frequencies 1/2, 1/4, 1/8, 1/8: 1.75 bits, by an optimal code too.
    const { plugInPerSymbol, huffmanPerSymbol } = blockView(
      oneMessage(Uint8Array.of(0, 0, 0, 0, 1, 1, 2, 3), 4),
    )[0];
    expect([plugInPerSymbol, huffmanPerSymbol]).toEqual([1.75, 1.75]);
  });

  it('stops where no block is whole, and where too many differ', () => {
    expect(blockView(oneMessage(new Uint8Array(0), 256))).toEqual([]);
    expect(blockView(sequenceOf([[1, 2], [3], [], [4, 5]], 256))).toHaveLength(2);
    const different = oneMessage(
      Uint16Array.from({ length: 65_536 }, (_, i) => i),
      65_536,
    );
    expect(blockView(different, 3, 65_535)).toHaveLength(0);
    expect(blockView(different, 1, 65_536)[0]).toMatchObject({
      distinct: 65_536,
      plugInPerSymbol: 16,
      huffmanPerSymbol: 16,
      estimable: false,
    });
  });

  it('leaves NSB out only where the number of cells is beyond doubles', () => {
    const wide = blockView(oneMessage(new Uint32Array(320), 2 ** 32), 32);
    expect(wide[30].nsbPerSymbol).toBeDefined();
    expect(wide[31].nsbPerSymbol).toBeUndefined();
  });
});
