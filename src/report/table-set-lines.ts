import type { CellRecord } from '../harness/run-record.ts';
import { decimalsFor, rateText } from './figures.ts';

const KEY = 'tables_in_set';

/** What cells must have in common to stand in one line. */
function familyOf({ coder, params, tables, reset }: CellRecord): string {
  const others = Object.entries(params).filter(([key]) => key !== KEY);
  return JSON.stringify([coder, others.sort(([a], [b]) => (a < b ? -1 : 1)), tables, reset]);
}

/** The candidate's name without the number of its tables. */
function nameOf({ candidate }: CellRecord): string {
  return candidate.replace(/([:,])tables_in_set=\d+,?/, '$1').replace(/[:,]$/, '');
}

/**
 * A sentence for each group of verified cells that differ only in how many tables are in their set: the rates, selectors counted,
 * and from which number on more tables do not pay.
 * @param noun  `byte`, `symbol` … as in "bits/byte"
 */
export function tableSetLines(cells: readonly CellRecord[], noun: string): string[] {
  const families = new Map<string, CellRecord[]>();
  for (const cell of cells) {
    if (!cell.verified || typeof cell.params[KEY] !== 'number') continue;
    const family = familyOf(cell);
    families.set(family, [...(families.get(family) ?? []), cell]);
  }
  return [...families.values()]
    .filter((family) => family.length > 1)
    .map((family) => {
      const rows = family
        .map((cell) => ({ count: Number(cell.params[KEY]), rate: cell.rate!, cell }))
        .sort((a, b) => a.count - b.count);
      const best = rows.reduce((least, row) => (row.rate < least.rate ? row : least));
      const decimals = decimalsFor(best.rate);
      const rates = rows.map(({ count, rate }) => `${count}: ${rateText(rate, decimals)}`);
      const more = best === rows.at(-1) ? '' : `; more than ${best.count} do not pay`;
      return `${nameOf(best.cell)} by tables in set: ${rates.join(', ')} bits/${noun}${more}.`;
    });
}
