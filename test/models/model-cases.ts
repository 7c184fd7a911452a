import fc from 'fast-check';

export interface ModelCase {
  readonly alphabetSize: number;
  readonly order: number;
  readonly symbols: Uint16Array;
  /** Ends of messages, ascending. */
  readonly ends: number[];
}

/** Skewed, repetitive and uniform symbols over degenerate and usual alphabets, cut into messages. */
export const modelCases: fc.Arbitrary<ModelCase> = fc
  .record({
    alphabetSize: fc.constantFrom(1, 2, 3, 5, 17, 256, 257, 65536),
    order: fc.integer({ min: 0, max: 4 }),
    spread: fc.constantFrom(1, 2, 4, 30, 65536),
    length: fc.integer({ min: 0, max: 400 }),
    seed: fc.integer(),
    cuts: fc.array(fc.integer({ min: 0, max: 400 }), { maxLength: 5 }),
  })
  .map(({ alphabetSize, order, spread, length, seed, cuts }) => {
    const symbols = new Uint16Array(length);
    let state = seed >>> 0;
    for (let i = 0; i < length; i++) {
      state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
      const repeats = i > 8 && state >>> 30 === 0;
      symbols[i] = repeats
        ? symbols[i - 7]
        : ((state >>> 8) % Math.min(spread, alphabetSize)) + (spread < alphabetSize ? 1 : 0);
    }
    const ends = [...cuts.filter((cut) => cut < length), length].sort((a, b) => a - b);
    return { alphabetSize, order, symbols, ends };
  });
