/**
 * Entropy rate of English folded to 27 symbols against published figures: a sanity check, not a law.
 *
 * C. E. Shannon 1951, "Prediction and Entropy of Printed English": people guessing letter after letter with 100 letters before
 * them put the rate of 27-symbol English between 0.6 and 1.3 bits a letter. P. F. Brown and others 1992, "An Estimate of an
 * Upper Bound for the Entropy of English": a model trained on 583 million words codes 5.96 million characters at 1.75 bits a
 * character, in another alphabet (printable characters, both cases) and on another text.
 *
 * What this can show: an estimate below 0.6 bits, or a decoder that learns from one megabyte alone and yet reaches far less than
 * that model did, would mean that this program counts wrongly. What it cannot: which estimate is right. The texts differ, one
 * megabyte holds little of what a reader knows, and neither figure is a bound for a single text.
 */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { ensureDatasets } from '../../scripts/datasets.mjs';
import { adaptiveCeilings } from '../../src/entropy/ceilings.ts';
import { entropyByOrder } from '../../src/entropy/entropy-by-order.ts';
import { floorOf } from '../../src/entropy/floor.ts';
import { matchLengthEntropy } from '../../src/entropy/match-lengths.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';

const folder = await ensureDatasets();

const SHANNON_LOWER = 0.6;
const BROWN = 1.75;
/** What another text and alphabet may take off that figure; our own allowance. */
const SLACK = 0.25;

describe.each(['moby.txt', 'brown-words.txt'])('%s in 27 symbols', (name) => {
  const letters = readFileSync(join(folder, name), 'latin1')
    .toLowerCase()
    .replace(/[^a-z]+/g, ' ')
    .trim();
  const symbols = Uint8Array.from(letters, (c) => (c === ' ' ? 26 : c.charCodeAt(0) - 97));
  const sequence = oneMessage(symbols, 27);
  const entropy = entropyByOrder(sequence, { upto: 3, contexts: 'running' });
  const matches = matchLengthEntropy(sequence, entropy);
  const { ceilings } = adaptiveCeilings(sequence, { from: 4, upto: 4 });
  const floor = floorOf({ orders: entropy.orders, ceilings, matches });

  it('has a match-length estimate that sees beyond the orders counted, above what people reach', () => {
    expect(matches.valid).toBe(true);
    expect(matches.low).toBeGreaterThan(SHANNON_LOWER);
    expect(matches.high).toBeLessThan(entropy.orders[entropy.largestEstimable].corrected);
  });

  it('has a ceiling that no decoder so small should beat', () => {
    for (const { bitsPerSymbol } of ceilings) {
      expect(bitsPerSymbol).toBeGreaterThan(BROWN - SLACK);
    }
  });

  it('prints its figures beside Brown and others 1992, as a sanity line and no law', () => {
    const of = (rate: number): string => rate.toFixed(2);
    const line = `${name} in 27 symbols: estimate ${of(matches.bitsPerSymbol)}, bound ${of(floor.high)} bits a letter; Brown and others 1992: ${BROWN}`;
    console.info(line);
    expect(line).not.toMatch(/NaN|Infinity/);
  });

  it('has a floor between the two', () => {
    expect(floor.low).toBeGreaterThan(SHANNON_LOWER);
    expect(floor.point).toBeLessThan(floor.high);
    expect(floor.high).toBeLessThan(Math.log2(27));
    expect(floor.method).toContain('match lengths');
  });
});
