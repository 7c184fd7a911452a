import type { CellRecord, CorpusRecord, RunRecord } from '../harness/run-record.ts';
import { type CurveLine, linesOf, type Placed } from './curve-points.ts';
import { codedKeyOfCell, grouped, pooledRun, variationOfCell } from './pooled-record.ts';

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
  return grouped(all, variationOfCell).flatMap((cells) => {
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
  return grouped(all, variationOfCell).flatMap((cells): Curve[] => {
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
      grouped(cells, (cell) => variationWithout(cell, key)).flatMap((own): Curve[] => {
        const lines = linesOf(placedByVary(own, key, ownValue(key, record, corpus)));
        if (lines.length === 0) return [];
        const variation = variationWithout(own[0], key);
        return [{ corpus: corpus.name, over: key, from: 'vary', variation, lines }];
      }),
    );
}
