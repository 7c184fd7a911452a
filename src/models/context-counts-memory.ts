import { LimitError } from '../errors/errors.ts';

/** Most cells of a counting table: 64 MiB. */
const MOST_CELLS = 2 ** 24;

/**
 * Memory that a sequence and the counting of its contexts may take together, unless the caller says otherwise: with what
 * the program itself needs, a process stays below 1 GB.
 */
export const COUNTING_MEMORY_BYTES = 800 * 2 ** 20;

/**
 * Whether an order is counted in a table with a cell for every possible pair: where the table is small, both as such and
 * beside the data.
 */
export function countsDensely(symbolCount: number, distinct: number, order: number): boolean {
  const cells = distinct ** (order + 1);
  return cells <= MOST_CELLS && cells <= Math.max(1 << 16, 8 * symbolCount);
}

/** Bytes a symbol that sorting takes: two positions, digits, ranks, and the room of each window. */
function sortingBytesPerSymbol(distinct: number): number {
  const rankBytes = distinct <= 0x100 ? 1 : distinct <= 0x10000 ? 2 : 4;
  const digitBytes = distinct <= 0x10000 ? 2 : 4;
  return 8 + digitBytes + rankBytes + 1;
}

/** What the guard must know of a sequence. */
export interface CountingTask {
  readonly symbolCount: number;
  readonly symbolBytes: number;
  readonly distinct: number;
  readonly upto: number;
  readonly memoryBytes: number;
}

/** Bytes that the sequence and its counting take together at the worst moment. */
export function countingMemoryBytes(task: CountingTask): number {
  const { symbolCount, distinct } = task;
  let tableBytes = 0;
  let sorts = false;
  for (let order = 0; order <= task.upto; order++) {
    if (countsDensely(symbolCount, distinct, order)) tableBytes = 4 * distinct ** (order + 1);
    else sorts = true;
  }
  const sortingBytes = sorts ? symbolCount * sortingBytesPerSymbol(distinct) : 0;
  return symbolCount * task.symbolBytes + Math.max(tableBytes, sortingBytes);
}

const inMegabytes = (bytes: number): string => `${Math.ceil(bytes / 1e6)} MB`;

/**
 * Refuses what would not fit, before anything is allocated.
 * @throws LimitError naming the memory, the highest order that fits, and how many symbols would
 */
export function checkCountingMemory(task: CountingTask): void {
  const needed = countingMemoryBytes(task);
  if (needed <= task.memoryBytes) return;
  let order = task.upto;
  while (order >= 0 && countingMemoryBytes({ ...task, upto: order }) > task.memoryBytes) order--;
  const perSymbol = task.symbolBytes + sortingBytesPerSymbol(task.distinct);
  const part = Math.floor(task.memoryBytes / perSymbol);
  const lower = order < 0 ? '' : ` or ask for orders up to ${order} only`;
  throw new LimitError(
    `counting contexts up to order ${task.upto} over ${task.symbolCount} symbols takes more memory than is allowed`,
    {
      expected: `at most ${inMegabytes(task.memoryBytes)}`,
      got: inMegabytes(needed),
      advice: `Take a part of at most ${part} symbols${lower}.`,
    },
  );
}
