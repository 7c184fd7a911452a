import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { CtwModel } from '../../src/models/ctw.ts';
import { ctwTables, MOST_STEPS } from '../../src/models/ctw-tables.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { newSymbolArray, type SymbolArray } from '../../src/symbols/sequence.ts';
import { bitsOf, weightedProbability } from './ctw-reference.ts';

/** Codes, then decodes from the list of decisions; both ends must ask for the same probabilities. */
function roundTrip(symbols: SymbolArray, alphabetSize: number, depth: number, mostNodes?: number) {
  const decisions: [bit: number, ones: number][] = [];
  let bits = 0;
  new CtwModel(alphabetSize, depth, mostNodes).encode(symbols, 0, symbols.length, {
    put: (bit, ones) => {
      decisions.push([bit, ones]);
      bits -= Math.log2((bit === 1 ? ones : 65_536 - ones) / 65_536);
    },
  });
  const decoded = newSymbolArray(alphabetSize, symbols.length);
  let at = 0;
  new CtwModel(alphabetSize, depth, mostNodes).decode(
    {
      take: (ones) => {
        expect(ones).toBe(decisions[at][1]);
        return decisions[at++][0];
      },
    },
    decoded,
    0,
    symbols.length,
  );
  expect(at).toBe(decisions.length);
  return { decoded, bits, decisions };
}

describe('the tables', () => {
  it('hold costs and weights as floating point has them, to their rounding', () => {
    const { costs, weights } = ctwTables();
    for (const p of [1, 2, 3, 777, 32_767, 32_768, 65_535]) {
      expect(Math.abs(costs[p] / 65_536 - (16 - Math.log2(p)))).toBeLessThan(2 / 65_536);
    }
    for (let i = 0; i < weights.length; i++) {
      const odds = 2 ** ((i - MOST_STEPS) / 256);
      expect(Math.abs(weights[i] - (65_536 * odds) / (1 + odds))).toBeLessThan(0.501);
    }
  });
});

describe('CtwModel', () => {
  it('gives back any symbols, with probabilities that a stage can code', () => {
    const alphabets = fc.constantFrom(1, 2, 3, 5, 256, 257, 65_536);
    const cases = alphabets.chain((m) =>
      fc.record({
        m: fc.constant(m),
        depth: fc.integer({ min: 0, max: 4 }),
        symbols: fc.array(fc.nat({ max: m - 1 }), { maxLength: 60 }),
      }),
    );
    fc.assert(
      fc.property(cases, ({ m, depth, symbols }) => {
        const input = newSymbolArray(m, symbols.length);
        input.set(symbols);
        const { decoded, decisions } = roundTrip(input, m, depth);
        expect(decoded).toEqual(input);
        for (const [, ones] of decisions) {
          expect(Number.isInteger(ones) && ones >= 1 && ones <= 65_535).toBe(true);
        }
      }),
    );
  });

  it('costs what the exact block form says, on bits of any kind', () => {
    // Rounding to 65536ths in each of up to depth + 1 nodes: well below 1/1000 bit a decision unless probabilities are tiny.
    fc.assert(
      fc.property(
        fc.array(fc.nat({ max: 1 }), { minLength: 1, maxLength: 80 }),
        fc.integer({ min: 1, max: 4 }),
        (sequence, depth) => {
          const model = new CtwModel(2, depth);
          for (let i = 0; i < depth; i++) model.see(1);
          let bits = 0;
          model.encode(Uint8Array.from(sequence), 0, sequence.length, {
            put: (bit, ones) => {
              bits -= Math.log2((bit === 1 ? ones : 65_536 - ones) / 65_536);
            },
          });
          const exact = bitsOf(weightedProbability('1'.repeat(depth), sequence.join(''), depth));
          expect(Math.abs(bits - exact)).toBeLessThan(0.001 * sequence.length);
        },
      ),
      { numRuns: 40 },
    );
  });

  it('learns a source that depends on the second last symbol, to within what learning costs', () => {
    const generator = new SeededGenerator('second last');
    const symbols = new Uint8Array(20_000);
    for (let i = 2; i < symbols.length; i++) {
      symbols[i] = generator.real() < 0.9 ? symbols[i - 2] : generator.integer(0, 3);
    }
    // Rate: the symbol is the second last with 0.925, each of three others with 0.025.
    const rate = -0.925 * Math.log2(0.925) - 3 * 0.025 * Math.log2(0.025);
    const { bits } = roundTrip(symbols, 4, 4);
    // 16 contexts of 3 decisions, each ½ log2 n bits to learn (Krichevsky & Trofimov 1981), and the tree's shape.
    expect(bits / symbols.length).toBeGreaterThan(rate - 0.02);
    expect(bits / symbols.length).toBeLessThan(rate + 0.02 + (48 * 8 + 200) / symbols.length);
  });

  it('keeps counts of a long run bounded, and its cost small', () => {
    const { bits } = roundTrip(new Uint8Array(80_000), 2, 2);
    // At 1 ÷ 65 536 for the other bit each decision costs 2.2 · 10^−5 bits; the first ones ½ log2 n in all.
    expect(bits).toBeLessThan(80_000 * 2.3e-5 + 20);
  });

  it('goes on with the contexts it has when its table is full', () => {
    const generator = new SeededGenerator('full');
    const symbols = Uint8Array.from({ length: 8_000 }, () => generator.integer(0, 255));
    // 8 bits, 5 lengths: some 250 000 nodes are wanted, 12 288 fit.
    const full = roundTrip(symbols, 256, 4, 2 ** 14);
    expect(full.decoded).toEqual(symbols);
    expect(roundTrip(symbols, 256, 4).decoded).toEqual(symbols);
  });
});
