import type { Cell } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import { codedKeyOf, type Variation, variationText } from './variation.ts';

/** Whether what a cell knows beforehand depends on the train part. */
function isTrained({ policy }: Cell): boolean {
  return policy === 'shipped' || policy === 'primed';
}

/**
 * The plan's own cells, multiplied by what it varies: every combination of data and alignment. A cell that a variation cannot
 * change stands once, among those without it: tables that are not trained have no share of the train part.
 * @param cells   of the plan's own data and alignment
 * @param data    all data of the run, each corpus's own first
 * @param aligns  besides the plan's own; that one may be among them
 */
export function varyCells(
  cells: readonly Cell[],
  data: readonly Pick<CorpusData, 'name' | 'key' | 'vary'>[],
  aligns: readonly number[],
): Cell[] {
  return data.flatMap(({ name, key, vary = {} }) => {
    const own = cells.filter(
      (cell) => cell.corpus === name && (vary.trainShare === undefined || isTrained(cell)),
    );
    const others = aligns.flatMap((align) => own.map((cell) => ({ cell, align })));
    return [...own.map((cell) => ({ cell, align: cell.align })), ...others].flatMap(
      ({ cell, align }, i): Cell[] => {
        if (i >= own.length && align === cell.align) return [];
        const all: Variation = { ...(align === cell.align ? {} : { align }), ...vary };
        const text = variationText(all);
        if (text === '') return [cell];
        return [{ ...cell, id: cell.id + text, dataKey: key, align, vary: all }];
      },
    );
  });
}

/** Data in groups whose test parts are the same, so that one floor serves them; a corpus's own come first in its group. */
export function codedGroups(data: readonly CorpusData[]): CorpusData[][] {
  const groups = new Map<string, CorpusData[]>();
  for (const one of data) {
    const key = codedKeyOf(one.name, one.vary ?? {});
    groups.set(key, [...(groups.get(key) ?? []), one]);
  }
  return [...groups.values()];
}
