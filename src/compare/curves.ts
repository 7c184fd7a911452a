import type { CellRecord, CorpusRecord, RunRecord } from '../harness/run-record.ts';
import { codedKeyOfCell, pooledRun, variationOfCell } from './pooled-record.ts';

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

/** The corrected entropy of one order, where a curve goes over orders. */
export interface CurveEntropy {
  readonly k: number;
  readonly point: number;
  readonly low?: number;
  readonly high?: number;
  readonly estimable: boolean;
}

/** Rates against one thing that cells of a corpus differ in. */
export interface Curve {
  readonly corpus: string;
  /** A parameter's key, `reset`, or a key of `vary`: what x is. */
  readonly over: string;
  /** Where x comes from: a parameter of candidates, the R of `message*R` (message is 1), or what the plan varies. */
  readonly from: 'parameter' | 'reset' | 'vary';
  /** What else the plan varies, the same for all points, as it stands in ids; empty for the plan's own. */
  readonly variation: string;
  /** Least rate first. */
  readonly lines: readonly CurveLine[];
  /** For orders: what no model of that order is expected to beat in the long run. */
  readonly entropy?: readonly CurveEntropy[];
}

/** Fewest values of a parameter, or of R, that are worth a curve; two of what the plan varies are. */
const LEAST_VALUES = 3;
const TABLE_SETS = 'tables_in_set';

/** A cell as a point of a line: all that the cells of a line have in common, and where it stands. */
interface Placed {
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
function linesOf(placed: readonly Placed[]): CurveLine[] {
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

function groupBy<T>(items: readonly T[], keyOf: (item: T) => string): T[][] {
  const groups = new Map<string, T[]>();
  for (const item of items) {
    const key = keyOf(item);
    groups.set(key, [...(groups.get(key) ?? []), item]);
  }
  return [...groups.values()];
}

/** The candidate's text without one parameter. */
function withoutKey(candidate: string, key: string): string {
  return candidate.replace(new RegExp(`([:,])${key}=[^,]*,?`), '$1').replace(/[:,]$/, '');
}

/** Where cells of one coder stand on a curve over one of its parameters. */
function placedByParameter(cells: readonly CellRecord[], coder: string, key: string): Placed[] {
  const placed = cells
    .filter((cell) => cell.coder === coder)
    .flatMap((cell): Placed[] => {
      const value = cell.params[key] ?? (key === TABLE_SETS ? 1 : undefined);
      if (typeof value !== 'number') return [];
      return [{ cell, x: value, candidate: withoutKey(cell.candidate, key) }];
    });
  if (coder !== 'block-huffman' || key !== 'n') return placed;
  // Huffman words of single symbols are blocks of one.
  const single = cells.filter((cell) => cell.coder === 'huffman');
  return [
    ...placed,
    ...single.map((cell) => ({
      cell,
      x: 1,
      candidate: cell.candidate.replace(/^huffman/, coder),
    })),
  ];
}

/** Messages between two resets; undefined under `file` and `never`. */
function messagesApart(reset: string): number | undefined {
  if (reset === 'message') return 1;
  return reset.startsWith('message*') ? Number(reset.slice('message*'.length)) : undefined;
}

type VaryKey = 'train_share' | 'message_symbols' | 'align';

/** The plan's own value of what it varies; undefined where it has none, as whole files have no message size. */
function ownValue(key: VaryKey, record: RunRecord, corpus: CorpusRecord): number | undefined {
  if (key === 'train_share') return 1;
  return key === 'align' ? record.plan.align : corpus.message_symbols;
}

function placedByVary(
  cells: readonly CellRecord[],
  key: VaryKey,
  own: number | undefined,
): Placed[] {
  return cells.flatMap((cell) => {
    const x = cell.vary?.[key] ?? own;
    return x === undefined ? [] : [{ cell, x, candidate: cell.candidate }];
  });
}

/** All of a cell's variation but one key. */
function variationWithout(cell: CellRecord, key: VaryKey): string {
  const { [key]: _, ...vary } = cell.vary ?? {};
  return variationOfCell({ vary });
}

function entropyFor(record: RunRecord, cells: readonly CellRecord[]): CurveEntropy[] | undefined {
  const [cell] = cells;
  const key = codedKeyOfCell(cell);
  const own = record.entropy.filter((one) => (one.data ?? one.corpus) === key);
  const contexts = cells.some((one) => one.decodes_alone) ? 'message' : 'running';
  const found = own.find((one) => one.contexts === contexts) ?? own[0];
  return found?.orders.map(({ k, corrected, low, high, estimable }) => ({
    k,
    point: corrected,
    ...(low === undefined || high === undefined ? {} : { low, high }),
    estimable,
  }));
}

/**
 * Every curve that the cells of a run make, corpus by corpus: over each numeric parameter of a coder and over the resets
 * `message*R` where at least {@link LEAST_VALUES} values stand in one line, and over whatever the plan varies. A line holds
 * verified cells that differ in nothing else; folds are pooled. References have none.
 */
export function curvesOf(record: RunRecord): Curve[] {
  const { record: pooled } = pooledRun(record);
  return pooled.corpora.flatMap((corpus) => {
    const cells = pooled.cells.filter(
      (cell) => cell.corpus === corpus.name && cell.verified && !cell.reference,
    );
    return [
      ...parameterCurves(pooled, corpus.name, cells),
      ...resetCurves(corpus.name, cells),
      ...varyCurves(pooled, corpus, cells),
    ];
  });
}

function longest(lines: readonly CurveLine[]): number {
  return Math.max(0, ...lines.map((line) => line.points.length));
}

function parameterCurves(record: RunRecord, corpus: string, all: readonly CellRecord[]): Curve[] {
  return groupBy(all, variationOfCell).flatMap((cells) => {
    const variation = variationOfCell(cells[0]);
    const kinds = new Map<string, { coder: string; key: string }>();
    for (const { coder, params } of cells) {
      for (const [key, value] of Object.entries(params))
        if (typeof value === 'number') kinds.set(`${coder}:${key}`, { coder, key });
    }
    return [...kinds.values()].flatMap(({ coder, key }): Curve[] => {
      const placed = placedByParameter(cells, coder, key);
      const lines = linesOf(placed);
      if (longest(lines) < LEAST_VALUES) return [];
      const entropy =
        key === 'order'
          ? entropyFor(
              record,
              placed.map(({ cell }) => cell),
            )
          : undefined;
      return [
        {
          corpus,
          over: key,
          from: 'parameter',
          variation,
          lines,
          ...(entropy === undefined ? {} : { entropy }),
        },
      ];
    });
  });
}

function resetCurves(corpus: string, all: readonly CellRecord[]): Curve[] {
  return groupBy(all, variationOfCell).flatMap((cells): Curve[] => {
    const placed = cells.flatMap((cell): Placed[] => {
      // Shipped tables and coders without any have nothing to forget.
      const x =
        cell.tables === 'shipped' || cell.tables === 'none' ? undefined : messagesApart(cell.reset);
      return x === undefined
        ? []
        : [{ cell: { ...cell, reset: 'message*R' }, x, candidate: cell.candidate }];
    });
    const lines = linesOf(placed);
    if (longest(lines) < LEAST_VALUES) return [];
    return [{ corpus, over: 'reset', from: 'reset', variation: variationOfCell(cells[0]), lines }];
  });
}

function varyCurves(
  record: RunRecord,
  corpus: CorpusRecord,
  cells: readonly CellRecord[],
): Curve[] {
  const keys: readonly VaryKey[] = ['train_share', 'message_symbols', 'align'];
  return keys
    .filter((key) => cells.some((cell) => cell.vary?.[key] !== undefined))
    .flatMap((key) =>
      groupBy(cells, (cell) => variationWithout(cell, key)).flatMap((own): Curve[] => {
        const lines = linesOf(placedByVary(own, key, ownValue(key, record, corpus)));
        if (lines.length === 0) return [];
        const variation = variationWithout(own[0], key);
        return [{ corpus: corpus.name, over: key, from: 'vary', variation, lines }];
      }),
    );
}
