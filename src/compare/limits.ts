import type { CellFigures, FigureKey } from './cell-figures.ts';

/** What the product allows, as a plan writes it. */
export interface Limits {
  readonly max?: { readonly [key in FigureKey]?: number | undefined } | undefined;
  readonly min?: { readonly [key in FigureKey]?: number | undefined } | undefined;
  /** The form in which tables must be exportable. */
  readonly exports?: 'json' | 'c' | 'ts' | undefined;
  /** How few messages may be needed to decode one. */
  readonly reset?: string | undefined;
}

/** One limit held against one cell. */
export interface LimitVerdict {
  /** `max.flash_bytes`, `exports`, … */
  readonly key: string;
  readonly limit: number | string;
  /** Absent where the cell has no such figure. */
  readonly value?: number | string;
  readonly low?: number;
  readonly high?: number;
  readonly verdict: 'pass' | 'fail' | 'unknown';
  /** The interval lies on one side of the limit, or there is none to leave it open. */
  readonly certain: boolean;
  /** Room as a share of the limit: above 0 on the allowed side. */
  readonly margin?: number;
}

/** The numeric limits of a plan, one after another. */
export function numericLimits(
  limits: Limits,
): { readonly sense: 'max' | 'min'; readonly key: FigureKey; readonly limit: number }[] {
  return (['max', 'min'] as const).flatMap((sense) =>
    Object.entries(limits[sense] ?? {}).flatMap(([key, limit]) =>
      limit === undefined ? [] : [{ sense, key: key as FigureKey, limit }],
    ),
  );
}

/** The same limits with one number changed. */
export function withLimit(
  limits: Limits,
  sense: 'max' | 'min',
  key: FigureKey,
  limit: number,
): Limits {
  return { ...limits, [sense]: { ...limits[sense], [key]: limit } };
}

function numericVerdict(
  figures: CellFigures,
  sense: 'max' | 'min',
  key: FigureKey,
  limit: number,
): LimitVerdict {
  const figure = figures.of(key);
  const base = { key: `${sense}.${key}`, limit };
  if (figure === undefined) return { ...base, verdict: 'unknown', certain: false };
  const { value, low = value, high = value } = figure;
  const allowed = (x: number): boolean => (sense === 'max' ? x <= limit : x >= limit);
  const room = sense === 'max' ? limit - value : value - limit;
  return {
    ...base,
    value,
    ...(figure.low === undefined ? {} : { low }),
    ...(figure.high === undefined ? {} : { high }),
    verdict: allowed(value) ? 'pass' : 'fail',
    certain: allowed(low) === allowed(high),
    ...(limit === 0 ? {} : { margin: room / limit }),
  };
}

/** Messages that a reset lets pass before a decoder can begin anew; 1 where each decodes alone. */
function reachOf(reset: string): number {
  if (reset === 'message') return 1;
  return reset.startsWith('message*')
    ? Number(reset.slice('message*'.length))
    : Number.POSITIVE_INFINITY;
}

function resetVerdict({ cell }: CellFigures, limit: string): LimitVerdict {
  const value = cell.decodes_alone ? 'message' : cell.reset;
  // A file may be of any length: it is allowed where files are, and where nothing is asked.
  const rank = (reset: string) => (reset === 'never' ? 2 : reset === 'file' ? 1 : 0);
  const allowed =
    rank(value) <= rank(limit) && (rank(limit) > 0 || reachOf(value) <= reachOf(limit));
  return { key: 'reset', limit, value, verdict: allowed ? 'pass' : 'fail', certain: true };
}

/** Every limit held against a cell, in the order of the plan's keys. */
export function judge(figures: CellFigures, limits: Limits): LimitVerdict[] {
  const verdicts = numericLimits(limits).map(({ sense, key, limit }) =>
    numericVerdict(figures, sense, key, limit),
  );
  const { exports, reset } = limits;
  if (exports !== undefined) {
    const forms = figures.cell.exports ?? [];
    verdicts.push({
      key: 'exports',
      limit: exports,
      value: forms.length === 0 ? 'none' : forms.join(', '),
      verdict: forms.includes(exports) ? 'pass' : 'fail',
      certain: true,
    });
  }
  if (reset !== undefined) verdicts.push(resetVerdict(figures, reset));
  return verdicts;
}

/** A limit that is not shown to be met is not met. */
export const meetsAll = (verdicts: readonly LimitVerdict[]): boolean =>
  verdicts.every(({ verdict }) => verdict === 'pass');
