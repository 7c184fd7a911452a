import { type Allow, isWithin } from './allow.ts';
import type { AdoptedRun } from './history.ts';
import { own } from './pairing.ts';

/** A cell against the adopted run in which it carried fewest bits. */
export interface CellCreep {
  readonly id: string;
  readonly best: number;
  /** Index in the history. */
  readonly bestRun: number;
  readonly now: number;
  readonly beyond: boolean;
}

/** What became of a run's cells since the best of history. */
export interface Creep {
  /** Cells that history knows on the same data. */
  readonly cells: readonly CellCreep[];
  /** Σ now − best, in bits. */
  readonly sum: number;
  /** Cells that took more than is allowed over their best, the most first. */
  readonly beyond: readonly CellCreep[];
}

/** The figures of a cell in a run, where the run coded the same data. */
export function sameCell(
  run: AdoptedRun,
  of: AdoptedRun,
  id: string,
): AdoptedRun['cells'][string] | undefined {
  const [cell, asked] = [own(run.cells, id), own(of.cells, id)];
  if (cell === undefined || asked === undefined || cell.symbols !== asked.symbols) return undefined;
  return own(run.corpora, cell.corpus) === own(of.corpora, asked.corpus) ? cell : undefined;
}

/** Holds each cell of a run against its best in history: many small steps that were each allowed add up. */
export function creepOf(history: readonly AdoptedRun[], run: AdoptedRun, allow: Allow): Creep {
  const cells = Object.entries(run.cells).flatMap(([id, { bits: now }]): CellCreep[] => {
    let best: { bits: number; run: number } | undefined;
    history.forEach((earlier, i) => {
      const bits = sameCell(earlier, run, id)?.bits;
      if (bits !== undefined && (best === undefined || bits < best.bits)) best = { bits, run: i };
    });
    if (best === undefined) return [];
    const beyond = !isWithin(best.bits, now, allow.total);
    return [{ id, best: best.bits, bestRun: best.run, now, beyond }];
  });
  const beyond = cells.filter((cell) => cell.beyond);
  return {
    cells,
    sum: cells.reduce((sum, { now, best }) => sum + now - best, 0),
    beyond: beyond.sort((a, b) => b.now - b.best - (a.now - a.best)),
  };
}
