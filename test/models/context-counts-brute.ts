import type { ContextScope } from '../../src/models/context-counts.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

/** What a plain count with one map finds for one order. */
export interface BruteCounts {
  readonly positions: number;
  readonly contextCounts: number[];
  readonly pairCounts: number[];
  readonly blockBits: number[];
  readonly blockPositions: number[];
}

/** Counts contexts and pairs by their text, position by position. */
export function bruteCounts(
  sequence: SymbolSequence,
  order: number,
  scope: ContextScope,
  blocks: number,
): BruteCounts {
  const { symbols } = sequence;
  const ends = scope === 'message' ? [...sequence.messageEnds] : [symbols.length];
  const contexts = new Map<string, number>();
  const pairs = new Map<string, number>();
  const seen: { context: string; pair: string; start: number }[] = [];
  let from = 0;
  for (const to of ends) {
    for (let i = from + order; i < to; i++) {
      const context = symbols.slice(i - order, i).join();
      const pair = `${context}>${symbols[i]}`;
      contexts.set(context, (contexts.get(context) ?? 0) + 1);
      pairs.set(pair, (pairs.get(pair) ?? 0) + 1);
      seen.push({ context, pair, start: i - order });
    }
    from = to;
  }
  const blockLength = Math.max(1, Math.ceil(symbols.length / blocks));
  const blockBits = new Array<number>(blocks).fill(0);
  const blockPositions = new Array<number>(blocks).fill(0);
  for (const { context, pair, start } of seen) {
    const block = Math.floor(start / blockLength);
    blockBits[block] -= Math.log2(pairs.get(pair)! / contexts.get(context)!);
    blockPositions[block]++;
  }
  return {
    positions: seen.length,
    contextCounts: [...contexts.values()].sort((a, b) => a - b),
    pairCounts: [...pairs.values()].sort((a, b) => a - b),
    blockBits,
    blockPositions,
  };
}
