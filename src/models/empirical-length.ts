import type { SymbolSequence } from '../symbols/sequence.ts';
import { countContexts, type OrderCounts } from './context-counts.ts';
import { sumOfLogs } from './context-counts-tallies.ts';
import { NODE_PARENT, NODE_SECOND, NODE_WORDS } from './context-tree.ts';
import { PairTree } from './pair-tree.ts';

/**
 * Shortest code length of a whole sequence, in bits, under any one set of order-k distributions: Σ over contexts of
 * n log2 n − Σ over their symbols of c log2 c.
 *
 * Contexts that hold start values occur only at the first k symbols of a message (or of the sequence), and those without
 * only elsewhere: the two parts are counted apart, the large one by sorting, which needs far less memory than a tree.
 *
 * @param startAtMessages  contexts hold start values at each message, else only at the first symbols of the sequence
 */
export function empiricalLengthBits(
  sequence: SymbolSequence,
  order: number,
  startAtMessages: boolean,
): number {
  if (sequence.symbols.length === 0) return 0;
  const counts = countContexts(sequence, {
    upto: order,
    contexts: startAtMessages ? 'message' : 'running',
    blocks: 1,
  })[order];
  return countedBits(counts) + startBits(sequence, order, startAtMessages);
}

/** The sum over the contexts without start values. */
export function countedBits({
  contextTallies,
  pairTallies,
}: Pick<OrderCounts, 'contextTallies' | 'pairTallies'>): number {
  return Math.max(0, sumOfLogs(contextTallies) - sumOfLogs(pairTallies));
}

/** The same sum over the contexts with start values. */
function startBits(sequence: SymbolSequence, order: number, startAtMessages: boolean): number {
  if (order === 0) return 0;
  const { symbols, messageEnds, alphabetSize } = sequence;
  const pairs = new PairTree(alphabetSize, order);
  if (startAtMessages) {
    let from = 0;
    for (const to of messageEnds) {
      pairs.count(symbols, from, Math.min(to, from + order));
      pairs.start();
      from = to;
    }
  } else {
    pairs.count(symbols, 0, Math.min(symbols.length, order));
  }
  return startContextBits(pairs, order);
}

/** The sum over strings of order + 1 symbols, the first of which hold start values. */
export function startContextBits(pairs: PairTree, order: number): number {
  const { words, nodeCount } = pairs.tree;
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
