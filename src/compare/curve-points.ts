import type { CellRecord } from '../harness/run-record.ts';

/** The rate of one cell at one value of what a curve goes over. */
export interface CurvePoint {
  readonly x: number;
  /** Bits per symbol. */
  readonly rate: number;
  /**
   * Half the width of the rate's 95 % interval, by that of the mean over messages; absent where messages differ in length, so
   * that the interval of their mean is not that of the rate.
   */
  readonly margin?: number;
  /** Without its fold, where folds are pooled. */
  readonly cell: string;
}

/** Cells that differ in one thing only. */
export interface CurveLine {
  /** The candidate without what the curve goes over: `arith:backoff=none`. */
  readonly candidate: string;
  readonly tables: string;
  readonly reset: string;
  /** By x, which is never equal; at least two. */
  readonly points: readonly CurvePoint[];
}

/** A cell as a point of a line: all that the cells of a line have in common, and where it stands. */
export interface Placed {
  readonly cell: CellRecord;
  readonly candidate: string;
  readonly x: number;
}

/** Whether all messages have as many symbols: no file ends with a shorter one. */
function hasEqualMessages({ messages_as, symbol_count, message_count }: CellRecord): boolean {
  const rule = /^(every|records)=(\d+)$/.exec(messages_as);
  if (rule === null) return false;
  const size = symbol_count! / message_count!;
  const count = Number(rule[2]);
  return rule[1] === 'every' ? size === count : Number.isInteger(size / count);
}

function pointOf({ cell, x }: Placed): CurvePoint {
  const { mean, mean_low, mean_high } = cell.message_bytes ?? {};
  const known = mean_low !== undefined && mean_high !== undefined && mean! > 0;
  return {
    x,
    rate: cell.rate!,
    ...(known && hasEqualMessages(cell)
      ? { margin: (cell.rate! * Math.max(mean_high - mean!, mean! - mean_low)) / mean! }
      : {}),
    cell: cell.id,
  };
}

/** Lines of at least two points; of cells that stand at the same x, the first. */
export function linesOf(placed: readonly Placed[]): CurveLine[] {
  const lines = new Map<string, Placed[]>();
  for (const one of placed) {
    const key = JSON.stringify([one.candidate, one.cell.tables, one.cell.reset]);
    const line = lines.get(key) ?? [];
    if (!line.some(({ x }) => x === one.x)) lines.set(key, [...line, one]);
  }
  return [...lines.values()]
    .filter((line) => line.length > 1)
    .map(
      (line): CurveLine => ({
        candidate: line[0].candidate,
        tables: line[0].cell.tables,
        reset: line[0].cell.reset,
        points: line.map(pointOf).sort((a, b) => a.x - b.x),
      }),
    )
    .sort((a, b) => leastRate(a) - leastRate(b));
}

/** The least rate of a line. */
export function leastRate({ points }: CurveLine): number {
  return Math.min(...points.map((point) => point.rate));
}
