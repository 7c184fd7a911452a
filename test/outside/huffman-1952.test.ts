/**
 * D. A. Huffman, Proc. IRE 40(9), 1952, Tables I and II: 13 messages, 3.42 digits a message on
 * average.
 */
import { describe, expect, it } from 'vitest';
import { codeLengths } from '../../src/stages/code-lengths.ts';
import vectors from './vectors/huffman-1952.json' with { type: 'json' };

describe('Huffman 1952', () => {
  const [example] = vectors.cases;

  it('13 messages: the mean length is 3.42', () => {
    const weights = example.weights_percent;
    const lengths = codeLengths(weights, 24);
    const total = weights.reduce((sum, weight, i) => sum + weight * lengths[i], 0);
    expect(total).toBe(342);
    expect(example.mean_length).toBe(3.42);
  });

  it('13 messages: the entropy is 3.3546 bits', () => {
    const entropy = example.weights_percent.reduce(
      (sum, weight) => sum - (weight / 100) * Math.log2(weight / 100),
      0,
    );
    expect(entropy).toBeCloseTo(example.entropy_bits, 12);
    expect(entropy).toBeCloseTo(3.3546, 4);
  });
});
