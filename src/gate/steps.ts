import { type Growth, isWithin } from './allow.ts';
import { sameCell } from './creep.ts';
import type { AdoptedRun } from './history.ts';

/** A run at which a cell came to take more than was allowed. */
export interface Step {
  /** Index in the history. */
  readonly run: number;
  readonly id: string;
  /** `step`: over the run before. `creep`: over its best, by steps that were each allowed. */
  readonly kind: 'step' | 'creep';
  /** Bits. */
  readonly was: number;
  readonly now: number;
}

interface Series {
  readonly before: number;
  readonly best: number;
  /** That its best was left behind has been said. */
  readonly crept: boolean;
  readonly run: AdoptedRun;
}

/**
 * The runs of a history at which a cell grew by more than allowed, earliest first. A cell is followed over runs that coded the same
 * data; runs without it are passed over.
 * @param allowed  absent: what each run allowed itself
 */
export function stepsOf(history: readonly AdoptedRun[], allowed?: Growth): Step[] {
  const series = new Map<string, Series>();
  const steps: Step[] = [];
  history.forEach((run, index) => {
    const allow = allowed ?? run.allow.total;
    for (const [id, { bits: now }] of Object.entries(run.cells)) {
      const last = series.get(id);
      if (last === undefined || sameCell(last.run, run, id) === undefined) {
        series.set(id, { before: now, best: now, crept: false, run });
        continue;
      }
      const { before, best } = last;
      const stepped = !isWithin(before, now, allow);
      const beyond = !isWithin(best, now, allow);
      if (stepped) steps.push({ run: index, id, kind: 'step', was: before, now });
      else if (beyond && !last.crept) {
        steps.push({ run: index, id, kind: 'creep', was: best, now });
      }
      series.set(id, { before: now, best: Math.min(best, now), crept: beyond, run });
    }
  });
  return steps;
}
