/**
 * Length-limited codes: L. L. Larmore, D. S. Hirschberg, J. ACM 37(3), 1990. Totals found by
 * exhaustive search over all length sets outside this project, and lengths of the unlimited code by
 * the in-place method of A. Moffat, J. Katajainen, WADS 1995.
 */
import { describe, expect, it } from 'vitest';
import { codeLengths } from '../../src/stages/code-lengths.ts';
import vectors from './vectors/length-limited.json' with { type: 'json' };

function totalOf(weights: number[], lengths: Uint8Array): number {
  return weights.reduce((sum, weight, i) => sum + weight * lengths[i], 0);
}

describe('length-limited codes', () => {
  const limited = vectors.cases.filter((c) => c.max_length !== undefined);
  const unlimited = vectors.cases.filter((c) => c.unlimited_huffman_total !== undefined);

  it('has both kinds of cases', () => {
    expect(limited.length).toBeGreaterThan(10);
    expect(unlimited.length).toBeGreaterThan(3);
  });

  it.each(limited.map((c) => [c.weights, c.max_length, c.min_total_bits] as const))(
    '%j in at most %d bits: %d in all',
    (weights, maxLength, total) => {
      const lengths = codeLengths(weights, maxLength!);
      expect(totalOf(weights, lengths)).toBe(total);
      expect(Math.max(...lengths)).toBeLessThanOrEqual(maxLength!);
    },
  );

  it.each(unlimited.map((c) => [c.weights, c.unlimited_huffman_total] as const))(
    '%j without a limit: %d in all',
    (weights, total) => {
      expect(totalOf(weights, codeLengths(weights, 32))).toBe(total);
    },
  );
});
