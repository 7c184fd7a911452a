/**
 * Count vectors whose plug-in and Miller–Madow entropies were computed outside in two ways (doubles, and 40 digits); the
 * last is published: test code of another language that quotes the R package `entropy` (Hausser & Strimmer 2009).
 */
import { describe, expect, it } from 'vitest';
import { millerMadow } from '../../src/entropy/miller-madow.ts';
import { plugIn } from '../../src/entropy/plug-in.ts';
import { countContexts } from '../../src/models/context-counts.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';
import vectors from './vectors/entropy-estimators.json' with { type: 'json' };

/** A sequence in which symbol i occurs counts[i] times. */
function spread(counts: readonly number[]) {
  const symbols = counts.flatMap((count, symbol) => new Array<number>(count).fill(symbol));
  return oneMessage(Uint8Array.from(symbols), Math.max(1, counts.length));
}

describe.each(vectors.cases)('counts $name', (vector) => {
  const [counts] = countContexts(spread(vector.counts), { upto: 0, contexts: 'running' });

  it('have the plug-in entropy found outside', () => {
    const expected = vector.plugin_bits ?? vector.plugin_nats / Math.LN2;
    expect(plugIn.estimate(counts)).toBeCloseTo(expected, 10);
  });

  const corrected = vector.miller_madow_bits;
  if (corrected !== undefined) {
    it('have the Miller–Madow entropy found outside', () => {
      expect(millerMadow.estimate(counts)).toBeCloseTo(corrected, 10);
    });
  }
});
