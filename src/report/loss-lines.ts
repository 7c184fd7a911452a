import type { CellRecord } from '../harness/run-record.ts';
import { rateText } from './figures.ts';

/** Groups that are shown, best rate first. */
const MOST_LINES = 3;

/** Messages between resets under `message` and `message*R`. */
function messagesApart(reset: string): number | undefined {
  if (reset === 'message') return 1;
  return reset.startsWith('message*') ? Number(reset.slice('message*'.length)) : undefined;
}

/**
 * Rate against R: a line for each candidate and policy that was run under several resets every R messages, with what one lost
 * message spoils; units of it where messages hold several.
 */
export function resetLines(cells: readonly CellRecord[], noun: string): string[] {
  const groups = new Map<string, CellRecord[]>();
  for (const cell of cells) {
    if (!cell.verified || cell.loss === undefined || messagesApart(cell.reset) === undefined)
      continue;
    const key = `${cell.candidate}@${cell.tables}`;
    groups.set(key, [...(groups.get(key) ?? []), cell]);
  }
  return [...groups.values()]
    .filter((group) => group.length > 1)
    .sort((a, b) => leastRate(a) - leastRate(b))
    .slice(0, MOST_LINES)
    .map((group) => {
      const parts = group
        .sort((a, b) => messagesApart(a.reset)! - messagesApart(b.reset)!)
        .map((cell, i) => `${cell.reset} ${rateText(cell.rate!)} (${lostText(cell, i === 0)})`);
      const { candidate, tables } = group[0];
      return `${candidate} ${tables}: ${parts.join(', ')} bits/${noun}.`;
    });
}

const leastRate = (group: readonly CellRecord[]): number =>
  Math.min(...group.map((cell) => cell.rate!));

function lostText(cell: CellRecord, withWords: boolean): string {
  const { per_lost_message: messages, units_per_lost_message: units } = cell.loss!;
  const text = String(Number((units ?? messages).toPrecision(2)));
  if (!withWords) return text;
  return units === undefined ? `${text} lost for each lost` : `${text} units for each lost message`;
}
