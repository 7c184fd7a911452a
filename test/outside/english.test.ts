/**
 * English folded to 27 symbols (a to z, and one space for every run of anything else): about 4.1 bits at order 0 against
 * log2 27 = 4.755; the letter e about 3.5 bits, the space about 2.4, each ± 0.3 (common practice, no source).
 */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { ensureDatasets } from '../../scripts/datasets.mjs';
import { entropyByOrder } from '../../src/entropy/entropy-by-order.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';

const folder = await ensureDatasets();

function foldedSymbols(name: string): Uint8Array {
  const text = readFileSync(join(folder, name), 'latin1');
  const folded = text
    .toLowerCase()
    .replace(/[^a-z]+/g, ' ')
    .trim();
  return Uint8Array.from(folded, (letter) => (letter === ' ' ? 26 : letter.charCodeAt(0) - 97));
}

describe.each(['moby.txt', 'brown-words.txt'])('%s in 27 symbols', (name) => {
  const symbols = foldedSymbols(name);
  const { orders } = entropyByOrder(oneMessage(symbols, 27), { upto: 3, contexts: 'running' });
  const idealBits = (symbol: number) =>
    -Math.log2(symbols.filter((s) => s === symbol).length / symbols.length);

  it('uses all of them', () => {
    expect(orders[0].pairs).toBe(27);
    expect(Math.log2(27)).toBeCloseTo(4.755, 3);
  });

  it('needs about 4.1 bits at order 0', () => {
    expect(Math.abs(orders[0].corrected - 4.1)).toBeLessThan(0.3);
  });

  it('needs about 3.5 bits for e and 2.4 for the space', () => {
    expect(Math.abs(idealBits(4) - 3.5)).toBeLessThan(0.3);
    expect(Math.abs(idealBits(26) - 2.4)).toBeLessThan(0.3);
  });

  it('falls with each order about as Shannon found', () => {
    // C. E. Shannon, "Prediction and Entropy of Printed English", 1951: 4.03 and 3.32 bits for single letters and pairs of
    // 27 symbols, from tables of his time; another text may differ by 0.3.
    expect(Math.abs(orders[0].corrected - 4.03)).toBeLessThan(0.3);
    expect(Math.abs(orders[1].corrected - 3.32)).toBeLessThan(0.3);
    expect(orders.slice(0, 3).every((order) => order.estimable)).toBe(true);
  });
});
