import { availableParallelism, freemem } from 'node:os';
import type { Plan } from '../corpus/plan.ts';
import type { CorpusData } from './corpus-data.ts';

/** What a cell may take before it is stopped and counts as failed. */
export interface CellBudget {
  readonly seconds: number;
  readonly memoryBytes: number;
}

/** Where a plan says nothing: long enough for orders and mixtures on tens of megabytes, short enough for a hung coder. */
export const USUAL_BUDGET: CellBudget = { seconds: 600, memoryBytes: 2e9 };

/** A plan's words, with the usual where it says nothing. */
export function budgetOf({
  cellSeconds = USUAL_BUDGET.seconds,
  cellMemoryBytes = USUAL_BUDGET.memoryBytes,
}: Plan['budget']): CellBudget {
  return { seconds: cellSeconds, memoryBytes: cellMemoryBytes };
}

/** What a worker takes by itself, and for each byte of symbols that it codes: common practice, no source. */
const WORKER_BYTES = 256e6;
const BYTES_A_SYMBOL_BYTE = 32;

/** Workers that suit this machine: one a core, fewer where memory would not hold as many. */
export function usualLanes(corpora: readonly CorpusData[], budget: CellBudget): number {
  const largest = Math.max(
    0,
    ...corpora.map(({ train, test }) => test.symbols.byteLength + (train?.symbols.byteLength ?? 0)),
  );
  const each = Math.min(budget.memoryBytes, WORKER_BYTES + BYTES_A_SYMBOL_BYTE * largest);
  return Math.max(1, Math.min(availableParallelism(), Math.floor(freemem() / each)));
}
