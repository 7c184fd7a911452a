/**
 * Count vectors whose entropies were computed outside in two ways (doubles, and 40 digits or another formulation): plug-in,
 * Miller–Madow 1955, Grassberger 2003, Chao & Shen 2003, Nemenman, Shafee & Bialek 2001 (NSB; a quadrature of 30 digits stands behind it).
 * The last case is published: plug-in, Chao–Shen and NSB of the first vector by test code of another language and a manual
 * page that quote the R package `entropy` (Hausser & Strimmer 2009); NSB of vector readme20 by the readme of the Python
 * package `ndd`.
 */
import { describe, expect, it } from 'vitest';
import { chaoShen } from '../../src/entropy/chao-shen.ts';
import { entropyByOrder } from '../../src/entropy/entropy-by-order.ts';
import { grassberger } from '../../src/entropy/grassberger.ts';
import { millerMadow } from '../../src/entropy/miller-madow.ts';
import { nsbEntropyBits } from '../../src/entropy/nsb.ts';
import { plugIn } from '../../src/entropy/plug-in.ts';
import { countContexts } from '../../src/models/context-counts.ts';
import { talliesOf } from '../../src/models/context-counts-tallies.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';
import vectors from './vectors/entropy-estimators.json' with { type: 'json' };

/** A sequence in which symbol i occurs counts[i] times. */
function spread(counts: readonly number[]) {
  const symbols = counts.flatMap((count, symbol) => new Array<number>(count).fill(symbol));
  return oneMessage(Uint8Array.from(symbols), Math.max(1, counts.length));
}

const inNats = (bits: number): number => bits * Math.LN2;
const nsbNats = (counts: readonly number[]): number =>
  inNats(nsbEntropyBits(talliesOf(counts.filter((count) => count > 0)), counts.length));

describe.each(vectors.cases)('counts $name', (vector) => {
  const sequence = spread(vector.counts);
  const [counts] = countContexts(sequence, { upto: 0, contexts: 'running' });

  it('have the plug-in entropy found outside', () => {
    const expected = vector.plugin_bits ?? vector.plugin_nats / Math.LN2;
    expect(plugIn.estimate(counts)).toBeCloseTo(expected, 10);
  });

  for (const [estimator, expected] of [
    [millerMadow, vector.miller_madow_bits],
    [grassberger, vector.grassberger2003_bits],
    [chaoShen, vector.chao_shen_bits],
  ] as const) {
    if (expected === undefined) continue;
    it(`have the entropy by ${estimator.name} found outside`, () => {
      expect(estimator.estimate(counts)).toBeCloseTo(expected, 10);
    });
  }

  const nsb = vector.nsb_second_way_nats;
  if (nsb !== undefined) {
    it('have the entropy by NSB found outside', () => {
      expect(nsbNats(vector.counts)).toBeCloseTo(nsb, 10);
    });

    it('give the same by way of entropy by order', () => {
      const { orders } = entropyByOrder(sequence, { upto: 0, contexts: 'running', all: true });
      expect(orders[0].estimates).toEqual({
        grassberger: expect.closeTo(vector.grassberger2003_bits!, 10),
        chaoShen: expect.closeTo(vector.chao_shen_bits!, 10),
        nsb: expect.closeTo(nsb / Math.LN2, 10),
      });
    });
  }
});

describe('figures published by others', () => {
  const published = vectors.cases.find((vector) => vector.kind !== undefined)!;
  const readme = vectors.cases.find((vector) => vector.name === 'readme20')!;

  it('Chao–Shen', () => {
    const bits = (counts: readonly number[]): number =>
      chaoShen.estimate(countContexts(spread(counts), { upto: 0, contexts: 'running' })[0]);
    expect(inNats(bits(published.counts))).toBeCloseTo(published.chao_shen_nats!, 11);
    expect(inNats(bits([1, 1, 1, 1, 1, 1]))).toBeCloseTo(published.chao_shen_six_ones_nats!, 11);
  });

  it('NSB, to the digits printed, or to the 10^−9 to which outside integrations agree', () => {
    expect(nsbNats(published.counts).toFixed(6)).toBe(String(published.nsb_nats_6_decimals));
    expect(Math.abs(nsbNats(readme.counts) - published.nsb_readme20_nats!)).toBeLessThan(1e-9);
  });
});
