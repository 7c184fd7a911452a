import type { MannerResult } from '../harness/run-with.ts';
import { countText } from '../report/figures.ts';

/** What is worth saying of the cache after a run. */
export function cacheNotes({ record, cellsTaken, cacheTrouble }: MannerResult): string[] {
  const cells = record.cells.length;
  return [
    ...(cellsTaken === 0
      ? []
      : [
          `bits of ${countText(cellsTaken)} of ${countText(cells)} cells came from the cache; --fresh codes them anew`,
        ]),
    ...(record.partial && cacheTrouble === undefined
      ? ['interrupted; the same command goes on where this run ended']
      : []),
    ...(cacheTrouble === undefined
      ? []
      : [`nothing could be kept in the cache: ${cacheTrouble}; the run is whole without it`]),
  ];
}
