import type { CorpusData } from './corpus-data.ts';
import type { Executor } from './executor.ts';
import { Interrupted } from './pause.ts';
import type { RunBoard } from './run-board.ts';
import type { CellFailure } from './run-cell.ts';
import type { CodedGroup } from './run-group.ts';
import type { CellTimes, TimingOptions } from './time-cell.ts';
import { isPlain } from './variation.ts';

export interface RunTimes {
  /** By cell id. */
  readonly times: ReadonlyMap<string, CellTimes>;
  /** Cells that were coded right and failed when they were coded again to be timed. */
  readonly failures: ReadonlyMap<string, CellFailure>;
  readonly partial: boolean;
}

/** Times the verified cells, the plan's own, one after another in their order, each alone. */
export async function timeCells(
  groups: readonly CodedGroup[],
  data: readonly CorpusData[],
  options: TimingOptions | undefined,
  executor: Executor,
  board: RunBoard,
): Promise<RunTimes> {
  const times = new Map<string, CellTimes>();
  const failures = new Map<string, CellFailure>();
  if (options === undefined) return { times, failures, partial: false };
  const cells = groups
    .flatMap(({ results }) => results)
    .filter((result) => !('failure' in result) && isPlain(result.cell.vary ?? {}))
    .map(({ cell }) => cell);
  const dataOf = new Map(data.map((one) => [one.key, one]));
  board.beginTiming(cells.length);
  for (const cell of cells) {
    try {
      const found = await board.watch(cell.id, (control) =>
        executor.cellTimes(cell, dataOf.get(cell.dataKey)!, options, control),
      );
      if (found !== undefined && 'failure' in found) failures.set(cell.id, found);
      else if (found !== undefined) times.set(cell.id, found);
    } catch (error) {
      if (!(error instanceof Interrupted)) throw error;
      return { times, failures, partial: true };
    }
    board.cellDone();
  }
  return { times, failures, partial: false };
}
