import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { sortedSuffixes } from '../../src/models/suffix-common.ts';
import { markovTwin } from '../../src/models/suffix-twin.ts';
import type { SymbolArray } from '../../src/symbols/sequence.ts';

const twinOf = (symbols: SymbolArray, order: number, seed = 1): SymbolArray =>
  markovTwin(symbols, sortedSuffixes(symbols), order, seed);

describe('markovTwin', () => {
  it('holds the strings of order + 1 symbols that the data hold, but where drawing began anew', () => {
    const texts = fc.array(fc.nat(3), { minLength: 1, maxLength: 80 });
    fc.assert(
      fc.property(texts, fc.integer({ min: 0, max: 4 }), fc.nat(9), (text, order, seed) => {
        const symbols = Uint8Array.from(text);
        const twin = twinOf(symbols, order, seed);
        expect(twin).toHaveLength(text.length);
        const known = new Set(text);
        expect([...twin].every((symbol) => known.has(symbol))).toBe(true);
      }),
    );
  });

  it('goes on for ever in a cycle, as the data do', () => {
    const cycle = Uint8Array.from({ length: 900 }, (_, i) => i % 3);
    const twin = twinOf(cycle, 1);
    let breaks = 0;
    for (let i = 1; i < twin.length; i++) if (twin[i] !== (twin[i - 1] + 1) % 3) breaks++;
    // The data's end is one of 300 places behind a context: drawing begins anew there about three times.
    expect(breaks).toBeLessThan(12);
  });

  it('keeps how often symbols follow a context, and forgets what came before', () => {
    // Each symbol equals the one two places before, and pairs of neighbours are all alike frequent.
    const symbols = Uint8Array.from({ length: 40_000 }, (_, i) => [0, 0, 1, 1][i % 4]);
    const twin = twinOf(symbols, 1);
    let follows = 0;
    let lag2 = 0;
    for (let i = 2; i < twin.length; i++) {
      if (twin[i] === twin[i - 1]) follows++;
      if (twin[i] !== twin[i - 2]) lag2++;
    }
    // In the data: a half of neighbours agree, none two places apart do. Five standard errors are 0.0125.
    expect(Math.abs(follows / twin.length - 0.5)).toBeLessThan(0.0125);
    expect(Math.abs(lag2 / twin.length - 0.5)).toBeLessThan(0.0125);
  });

  it('is determined by its seed', () => {
    const symbols = Uint16Array.from({ length: 500 }, (_, i) => (i * i) % 1000);
    expect(twinOf(symbols, 0, 5)).toEqual(twinOf(symbols, 0, 5));
    expect(twinOf(symbols, 0, 5)).not.toEqual(twinOf(symbols, 0, 6));
  });

  it.each([
    ['nothing', new Uint8Array(0)],
    ['fewer symbols than the order', Uint8Array.of(3, 4)],
    ['as many as the order', Uint8Array.of(3, 4, 5)],
  ])('is the data themselves where there is no context: %s', (_, symbols) => {
    expect(twinOf(symbols, 3)).toEqual(symbols);
  });
});
