import type { CorpusData } from './corpus-data.ts';
import type { DamagePlan } from './damage-experiment.ts';
import type { CellDamage } from './damage-schema.ts';
import type { Executor } from './executor.ts';
import { Interrupted } from './pause.ts';
import type { RunBoard } from './run-board.ts';
import type { CellBits, CellFailure } from './run-cell.ts';
import type { CellRecord } from './run-record.ts';
import { isPlain } from './variation.ts';

/** By cell id; undefined where an interrupt came first. */
export type DamageResults = ReadonlyMap<string, readonly CellDamage[] | CellFailure | undefined>;

/** Damages every cell that has a rate and is the plan's own, of folds the first. */
export async function damageResults(
  results: readonly (CellBits | CellFailure)[],
  dataOf: ReadonlyMap<string, CorpusData>,
  plan: DamagePlan,
  executor: Executor,
  board: RunBoard,
): Promise<DamageResults> {
  const cells = results.flatMap((result) =>
    'failure' in result || !isPlain(result.cell.vary ?? {}) ? [] : [result.cell],
  );
  const damages = cells.map(async (cell) => {
    try {
      const found = await board.watch(`${cell.id}: damage`, (control) =>
        executor.damage(cell, dataOf.get(cell.dataKey)!, plan, control),
      );
      return [cell.id, found] as const;
    } catch (error) {
      if (!(error instanceof Interrupted)) throw error;
      return [cell.id, undefined] as const;
    }
  });
  return new Map(await Promise.all(damages));
}

/** As a cell's record says it; nothing where it was not asked for. */
export function damageRecordOf(
  damage: readonly CellDamage[] | CellFailure | undefined,
): Pick<CellRecord, 'damage' | 'damage_failure'> {
  if (damage === undefined) return {};
  return 'failure' in damage ? { damage_failure: damage.failure } : { damage: [...damage] };
}
