import type { EntropyByOrder } from '../entropy/entropy-by-order.ts';
import { entropyOfCounts } from '../entropy/entropy-by-order.ts';
import { intervalUnits } from '../entropy/interval-units.ts';
import type { ContextScope } from '../models/context-counts.ts';
import { highestStreamedOrder, StreamedCounts } from '../models/stream-counts.ts';
import { fileEndsOf } from './corpus-floors.ts';
import type { StreamedData } from './stream-data.ts';

/** What is counted of a streamed corpus for one kind of contexts. */
export interface CountedScope {
  readonly entropy: EntropyByOrder;
  /** By order: shortest code length under one set of order-k distributions, with start contexts where contexts begin. */
  readonly fitBits: readonly number[];
}

/** The highest order that is counted in pieces for these symbols. */
export function highestOrderOf(data: StreamedData): number {
  let distinct = 0;
  for (const count of data.symbolCounts) if (count > 0) distinct++;
  return highestStreamedOrder(distinct);
}

/**
 * Counts the part that is coded; equal to what is counted of the whole.
 * @param upto   not above {@link highestOrderOf}
 * @param pause  awaited between chunks; may throw to stop
 * Cost: two passes over the data.
 */
export async function countStreamed(
  data: StreamedData,
  contexts: ContextScope,
  options: { readonly upto: number; readonly all?: boolean },
  pause: () => Promise<void>,
): Promise<CountedScope> {
  const { test, alphabetSize } = data.shape;
  const units = intervalUnits(test, fileEndsOf(data.shape));
  const counts = new StreamedCounts({
    alphabetSize,
    symbolCounts: data.symbolCounts,
    upto: options.upto,
    contexts,
    messageEnds: test.messageEnds,
    symbolCount: test.symbols.length,
    blocks: { count: units.ends.length, ends: units.ends },
  });
  for (const chunk of data.chunks(data.test)) {
    await pause();
    counts.count(chunk);
  }
  counts.settle();
  for (const chunk of data.chunks(data.test)) {
    await pause();
    counts.spread(chunk);
  }
  const orders = counts.finish();
  return {
    entropy: entropyOfCounts(orders, {
      contexts,
      symbolCount: test.symbols.length,
      alphabetSize,
      units,
      changes: false,
      all: options.all === true,
    }),
    fitBits: orders.map(({ order }) => counts.fitBits(order)),
  };
}
