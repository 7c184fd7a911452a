import type { CellRecord } from '../harness/run-record.ts';
import { countText, decimalsFor, rateText } from './figures.ts';

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

/** Flash by number of tables: of the end that the plan names, else of both, once where they are the same; empty where not told. */
function flashText(
  cells: readonly CellRecord[],
  device: 'encoder' | 'decoder' | undefined,
): string {
  const ends = device === undefined ? (['encoder', 'decoder'] as const) : [device];
  const texts = ends.map((end) =>
    cells
      .map((cell) => cell[end]?.flash_bytes)
      .map((bytes) => (bytes === undefined ? '–' : countText(bytes)))
      .join(', '),
  );
  if (!/\d/.test(texts.join())) return '';
  if (texts.length === 1 || texts[0] === texts[1]) return `; flash ${texts[0]} bytes`;
  return `; flash ${texts[0]} bytes at the encoder, ${texts[1]} at the decoder`;
}

/**
 * A sentence for each group of verified cells that differ only in how many tables are in their set: the rates, selectors counted,
 * the flash that the tables take where it is told, and from which number on more tables do not pay.
 * @param noun    `byte`, `symbol` … as in "bits/byte"
 * @param device  the end that the plan names as the small one
 */
export function tableSetLines(
  cells: readonly CellRecord[],
  noun: string,
  device?: 'encoder' | 'decoder',
): string[] {
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
      const flash = flashText(
        rows.map(({ cell }) => cell),
        device,
      );
      const more = best === rows.at(-1) ? '' : `; more than ${best.count} do not pay`;
      return `${nameOf(best.cell)} by tables in set: ${rates.join(', ')} bits/${noun}${flash}${more}.`;
    });
}
