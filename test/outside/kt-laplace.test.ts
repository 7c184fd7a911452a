/**
 * Sequential code lengths: R. Krichevsky, V. Trofimov, IEEE Trans. Inf. Theory 27(2), 1981 (block probabilities), and Laplace's
 * rule (T. M. Cover, J. A. Thomas, Elements of Information Theory, chapter 13). Values recomputed as exact fractions.
 */
import { describe, expect, it } from 'vitest';
import { arith } from '../../src/coders/arith.ts';
import { resolveParameters } from '../../src/coders/parameters.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';
import vectors from './vectors/kt-laplace.json' with { type: 'json' };

/** Ideal bits of a sequence with these counts, interleaved so that no order is special. */
function idealBits(counts: number[], rule: 'kt' | 'laplace'): number {
  const left = [...counts];
  const symbols: number[] = [];
  while (left.some((count) => count > 0)) {
    for (let symbol = 0; symbol < left.length; symbol++) {
      if (left[symbol]-- > 0) symbols.push(symbol);
    }
  }
  const given = { order: '0', backoff: 'none', counts: rule };
  const coder = arith.create(resolveParameters('arith', arith.declaration.parameters, given));
  const alphabetSize = counts.length;
  return coder.price!(oneMessage(Uint8Array.from(symbols), alphabetSize), {
    policy: 'learned',
    alphabetSize,
    reset: 'never',
    lengths: 'link',
    align: 8,
  }).idealBits;
}

interface Blocks {
  kind: string;
  a?: number;
  b?: number;
  bits?: number;
  counts?: number[];
  kt_bits?: number;
  laplace_bits?: number;
}
const cases: Blocks[] = vectors.cases;

describe('additive counts', () => {
  const binary = cases.filter((c) => c.kind === 'kt');
  it.each(binary.map((c) => [c.a!, c.b!, c.bits!]))('KT of %i zeros, %i ones', (a, b, bits) => {
    expect(Math.abs(idealBits([a, b], 'kt') - bits)).toBeLessThanOrEqual(1e-9 * bits);
  });

  const sequences = cases.filter((c) => c.kind === 'sequential');
  it.each(sequences.map((c) => [c.counts!, c]))('KT and Laplace of counts %j', (counts, c) => {
    expect(Math.abs(idealBits(counts, 'kt') - c.kt_bits!)).toBeLessThanOrEqual(1e-9 * c.kt_bits!);
    expect(Math.abs(idealBits(counts, 'laplace') - c.laplace_bits!)).toBeLessThanOrEqual(
      1e-9 * c.laplace_bits!,
    );
  });

  it('covers both kinds of vector', () => {
    expect(binary.length).toBeGreaterThan(20);
    expect(sequences.length).toBeGreaterThan(5);
  });
});
