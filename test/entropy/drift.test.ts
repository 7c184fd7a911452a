import { describe, expect, it } from 'vitest';
import { driftOf } from '../../src/entropy/drift.ts';
import { countByWindow, segmentLengths, windowStart } from '../../src/entropy/drift-counts.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { oneMessage, type SymbolArray } from '../../src/symbols/sequence.ts';

const N = 100_000;

/** h(p), bits: the closed form. */
const h = (p: number): number => -p * Math.log2(p) - (1 - p) * Math.log2(1 - p);

/** Independent bits, 1 with probability `p(i)`. */
function bits(seed: string, p: (i: number) => number, n = N): Uint8Array {
  const generator = new SeededGenerator(seed);
  return Uint8Array.from({ length: n }, (_, i) => (generator.real() < p(i) ? 1 : 0));
}

/** A chain of `m` states that stays where it is with probability `stay(i)`, else goes to any of the others. */
function sticky(seed: string, m: number, stay: (i: number) => number, n = N): Uint8Array {
  const generator = new SeededGenerator(seed);
  let state = 0;
  return Uint8Array.from({ length: n }, (_, i) => {
    if (generator.real() >= stay(i)) state = (state + generator.integer(1, m - 1)) % m;
    return state;
  });
}

const drift = (symbols: SymbolArray, m: number, seed: number) =>
  driftOf(oneMessage(symbols, m), { contexts: 'running', seed });

/** Somewhere between a tenth and nine tenths. */
const switchAt = (seed: number): number =>
  Math.floor(N * (0.1 + 0.8 * new SeededGenerator(`place ${seed}`).real()));

describe('a source that does not change', () => {
  // Stated: two tests at 0.001 each, so 0.2 in 100 on average; the promise is at most 1 in 100.
  it.each<[string, number, (seed: number) => Uint8Array]>([
    ['independent bits', 2, (seed) => bits(`iid ${seed}`, () => 0.11)],
    ['a slow chain', 2, (seed) => sticky(`slow ${seed}`, 2, () => 0.985)],
    ['a chain of five states', 5, (seed) => sticky(`five ${seed}`, 5, () => 0.7, 20_000)],
  ])('%s: at most one alarm in 100', (_, m, make) => {
    let alarms = 0;
    for (let seed = 0; seed < 100; seed++) {
      if (drift(make(seed), m, seed).tests.some((test) => test.found)) alarms++;
    }
    expect(alarms).toBeLessThanOrEqual(1);
  });

  it('shows windows whose own rate is the rate of the source, by the closed form', () => {
    const { windows, change } = drift(
      bits('flat', () => 0.11),
      2,
      1,
    );
    expect(change).toBeUndefined();
    expect(windows!.rates).toHaveLength(32);
    // The spread of a window's rate: √(p(1 − p)) · log2((1 − p)/p) ÷ √(n/32) = 0.017 bits; four of them.
    for (const { own } of windows!.rates) expect(Math.abs(own - h(0.11))).toBeLessThan(4 * 0.017);
    expect(Math.abs(windows!.oneTableCost)).toBeLessThan(4 * windows!.standardError);
  });
});

describe('a source that switches once', () => {
  /** Seeds of 20 at which the switch was found, within two windows of its place. */
  const foundOf = (m: number, make: (seed: number, at: number) => Uint8Array): number => {
    let found = 0;
    for (let seed = 0; seed < 20; seed++) {
      const at = switchAt(seed);
      const { change } = drift(make(seed, at), m, seed);
      if (change !== undefined && Math.abs(change.atSymbol - at) <= 2 * change.windowSymbols) {
        found++;
      }
    }
    return found;
  };

  it('is found where the rate grows by 0.2 bits/symbol, in 19 of 20 seeds', () => {
    // h(0.11) = 0.4999 and h(0.189) = 0.6993.
    expect(h(0.189) - h(0.11)).toBeCloseTo(0.2, 2);
    expect(
      foundOf(2, (seed, at) => bits(`p ${seed}`, (i) => (i < at ? 0.11 : 0.189))),
    ).toBeGreaterThanOrEqual(19);
  });

  it('is found where only the memory changes, by order 1', () => {
    // Both halves have equal frequencies of 0 and 1; rates h(0.2) = 0.722 and h(0.3) = 0.881.
    const make = (seed: number, at: number) => sticky(`m ${seed}`, 2, (i) => (i < at ? 0.8 : 0.67));
    expect(h(0.33) - h(0.2)).toBeGreaterThan(0.19);
    expect(foundOf(2, make)).toBeGreaterThanOrEqual(19);
    const { change } = drift(make(0, N / 2), 2, 0);
    expect(change!.order).toBe(1);
  });

  it('is found where the rate stays and the symbols change, and costs one table what the closed form says', () => {
    const make = (seed: number, at: number) => bits(`swap ${seed}`, (i) => (i < at ? 0.27 : 0.73));
    expect(foundOf(2, make)).toBeGreaterThanOrEqual(19);
    const { change, windows } = drift(make(0, N / 2), 2, 0);
    // One table of order 1 over both halves: the symbol before tells which half it is, and 1 follows 1 with 0.27² + 0.73².
    const cost = h(0.27 ** 2 + 0.73 ** 2) - h(0.27);
    expect(change!.order).toBe(1);
    expect(change!.rates!.oneTableCost).toBeCloseTo(cost, 2);
    expect(windows!.oneTableCost).toBeCloseTo(cost, 2);
    expect(change!.further).toBe(false);
  });

  it('is told from a change that goes on', () => {
    const { change } = drift(
      bits('ramp', (i) => 0.1 + (0.4 * i) / N),
      2,
      1,
    );
    expect(change!.further).toBe(true);
  });
});

describe('degenerate data', () => {
  it.each([0, 1, 63, 1023])('of %i symbols are not tested', (length) => {
    const found = driftOf(oneMessage(new Uint8Array(length), 2), { contexts: 'message' });
    expect(found.tests.map((t) => t.found)).toEqual([undefined, undefined]);
    expect(found.tests[0].reason).toMatch(/at least 1024 symbols/);
  });

  it('that are all equal do not change, and cost nothing', () => {
    const found = driftOf(oneMessage(new Uint8Array(1024), 1), { contexts: 'message' });
    expect(found.tests.map((t) => t.found)).toEqual([false, false]);
    expect(found.windows!.rates.every((rate) => rate.own === 0 && rate.underAll === 0)).toBe(true);
  });

  it('that are all different, in messages of one symbol, are not seen to change', () => {
    const symbols = Uint16Array.from({ length: 65_536 }, (_, i) => i);
    const found = driftOf(
      { alphabetSize: 65_536, symbols, messageEnds: Uint32Array.from(symbols, (i) => i + 1) },
      { contexts: 'message' },
    );
    expect(found.tests[0].found).toBe(false);
    expect(found.tests[1].reason).toMatch(/65536 different symbols are too many/);
    expect(found.windows).toBeUndefined();
  });
});

describe('counts by window', () => {
  it('are those of a plain count, with and without contexts over message ends', () => {
    const generator = new SeededGenerator(3);
    const symbols = Uint8Array.from({ length: 500 }, () => generator.integer(2, 6));
    const sequence = { alphabetSize: 7, symbols, messageEnds: Uint32Array.of(0, 120, 121, 500) };
    for (const contexts of ['message', 'running'] as const) {
      const counts = countByWindow(sequence, 1, 8, contexts);
      if (typeof counts === 'string') throw new Error(counts);
      const [whole] = segmentLengths(counts, [0, 8]);
      const pairs = new Map<string, number>();
      const befores = new Map<number, number>();
      let from = 0;
      let positions = 0;
      for (const to of contexts === 'message' ? sequence.messageEnds : [500]) {
        for (let i = from + 1; i < to; i++) {
          const key = `${symbols[i - 1]} ${symbols[i]}`;
          pairs.set(key, (pairs.get(key) ?? 0) + 1);
          befores.set(symbols[i - 1], (befores.get(symbols[i - 1]) ?? 0) + 1);
          positions++;
        }
        from = to;
      }
      let expected = 0;
      for (const [key, count] of pairs) {
        expected -= count * Math.log2(count / befores.get(Number(key.split(' ')[0]))!);
      }
      expect(whole.positions).toBe(positions);
      expect(whole.pairs).toBe(pairs.size);
      expect(whole.contexts).toBe(befores.size);
      expect(whole.ownBits).toBeCloseTo(expected, 8);
      expect(whole.underAllBits).toBeCloseTo(expected, 8);
      expect([...counts.positions].reduce((a, b) => a + b)).toBe(positions);
    }
  });

  it('cut windows at the same places whatever the length', () => {
    expect([0, 1, 2, 3].map((w) => windowStart(10, 3, w))).toEqual([0, 3, 6, 10]);
  });
});
