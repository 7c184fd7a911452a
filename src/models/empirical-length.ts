import type { SymbolSequence } from '../symbols/sequence.ts';
import { NODE_PARENT, NODE_SECOND, NODE_WORDS } from './context-tree.ts';
import { PairTrainer } from './pair-tree.ts';

/**
 * Shortest code length of a whole sequence, in bits, under any one set of order-k distributions: Σ over contexts of
 * n log2 n − Σ over their symbols of c log2 c.
 *
 * @param startAtMessages  contexts hold start values at each message, else only at the first symbols of the sequence
 */
export function empiricalLengthBits(
  sequence: SymbolSequence,
  order: number,
  startAtMessages: boolean,
): number {
  const trainer = new PairTrainer(sequence.alphabetSize, order, startAtMessages);
  trainer.push(sequence);
  const { tree } = trainer.pairs;
  const { words, nodeCount } = tree;
  const depths = new Uint8Array(nodeCount);
  const sums = new Float64Array(nodeCount);
  let bits = 0;
  for (let node = 1; node < nodeCount; node++) {
    const at = node * NODE_WORDS;
    const parent = words[at + NODE_PARENT];
    depths[node] = depths[parent] + 1;
    const count = words[at + NODE_SECOND];
    if (depths[node] !== order + 1 || count === 0) continue;
    sums[parent] += count;
    bits -= count * Math.log2(count);
  }
  for (const sum of sums) if (sum > 0) bits += sum * Math.log2(sum);
  return Math.max(0, bits);
}
