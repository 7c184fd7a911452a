import type { CellRecord, EntropyRecord, RunRecord } from '../harness/run-record.ts';
import { codedKeyOf, type Variation, variationOf, variationText } from '../harness/variation.ts';

/** A run as screens tell it: the cells of all folds as one, and what the plan varies apart or left out. */
export interface PooledRun {
  readonly record: RunRecord;
  /** By the id of a pooled cell: the rate of each fold, in their order. Empty without folds. */
  readonly foldRates: ReadonlyMap<string, readonly number[]>;
}

function variationWithoutFold({ fold: _, ...vary }: NonNullable<CellRecord['vary']>): Variation {
  return variationOf(vary);
}

/** What the plan varies of a cell besides folds, as it stands in its id; empty for the plan's own. */
export function variationOfCell({ vary = {} }: Pick<CellRecord, 'vary'>): string {
  return variationText(variationWithoutFold(vary));
}

/** Key of the entropies that a cell is held against, where folds are pooled. */
export function codedKeyOfCell({ corpus, vary = {} }: Pick<CellRecord, 'corpus' | 'vary'>): string {
  return codedKeyOf(corpus, variationWithoutFold(vary));
}

const sumOf = <T>(items: readonly T[], of: (item: T) => number): number =>
  items.reduce((sum, item) => sum + of(item), 0);

/** Mean weighted by the second figure; 0 where all weights are. */
function meanOf<T>(items: readonly T[], of: (item: T) => number, weight: (item: T) => number) {
  const total = sumOf(items, weight);
  return total === 0 ? 0 : sumOf(items, (item) => of(item) * weight(item)) / total;
}

function withoutFold(text: string): string {
  return text.replace(/\+fold=\d+/, '');
}

/** Items by key, groups and items in the order of their first appearance. */
export function grouped<T>(items: readonly T[], keyOf: (item: T) => string): T[][] {
  const groups = new Map<string, T[]>();
  for (const item of items) {
    const key = keyOf(item);
    groups.set(key, [...(groups.get(key) ?? []), item]);
  }
  return [...groups.values()];
}

/** What a cell tells of single messages, fields and files. */
const OF_ONE_FOLD = [
  'failure',
  'message_bytes',
  'messages',
  'rate_without_repeats',
  'files',
  'fields',
] as const;

function pooledAccount(folds: readonly CellRecord[]): NonNullable<CellRecord['account']> {
  const account: Record<string, number> = {};
  for (const fold of folds) {
    for (const [line, bits] of Object.entries(fold.account ?? {}))
      account[line] = (account[line] ?? 0) + (bits ?? 0);
  }
  return account;
}

/**
 * The cells of a candidate in all folds as one: sums of what is counted, so that the rate is the mean over all symbols. Costs
 * and times are those of the first fold; figures of single messages, fields and files are left out.
 */
function pooledCell(folds: readonly CellRecord[]): CellRecord {
  const [first] = folds;
  if (first.vary?.fold === undefined) return first;
  const { fold: _, ...vary } = first.vary;
  const base: CellRecord = { ...first, id: withoutFold(first.id), vary };
  if (Object.keys(vary).length === 0) delete base.vary;
  for (const key of OF_ONE_FOLD) delete base[key];
  const failed = folds.find((one) => !one.verified);
  if (failed !== undefined) {
    const failure = `Fold ${failed.vary!.fold}: ${failed.failure ?? ''}`;
    return { ...base, verified: false, failure };
  }
  const symbolCount = sumOf(folds, (one) => one.symbol_count!);
  const messageCount = sumOf(folds, (one) => one.message_count!);
  const carriedBits = sumOf(folds, (one) => one.carried_bits!);
  return {
    ...base,
    symbol_count: symbolCount,
    message_count: messageCount,
    coded_bytes: sumOf(folds, (one) => one.coded_bytes!),
    carried_bits: carriedBits,
    rate: symbolCount === 0 ? 0 : carriedBits / symbolCount,
    account: pooledAccount(folds),
    ...(first.units_per_message === undefined
      ? {}
      : {
          unit_count: sumOf(folds, (one) => one.unit_count!),
          units_per_message: {
            mean: sumOf(folds, (one) => one.unit_count!) / messageCount,
            min: Math.min(...folds.map((one) => one.units_per_message!.min)),
          },
        }),
    ...(first.loss === undefined ? {} : { loss: pooledLoss(folds) }),
    ...(first.billing === undefined ? {} : { billing: pooledBilling(folds) }),
  };
}

function pooledLoss(folds: readonly CellRecord[]): NonNullable<CellRecord['loss']> {
  const mean = (of: (loss: NonNullable<CellRecord['loss']>) => number): number =>
    meanOf(
      folds,
      (one) => of(one.loss!),
      (one) => one.message_count!,
    );
  const hasUnits = folds[0].loss!.units_per_lost_message !== undefined;
  return {
    share: mean((loss) => loss.share),
    per_lost_message: mean((loss) => loss.per_lost_message),
    ...(hasUnits ? { units_per_lost_message: mean((loss) => loss.units_per_lost_message!) } : {}),
  };
}

function pooledBilling(folds: readonly CellRecord[]): NonNullable<CellRecord['billing']> {
  return {
    step_bytes: folds[0].billing!.step_bytes,
    steps: sumOf(folds, (one) => one.billing!.steps),
    steps_per_unit: meanOf(
      folds,
      (one) => one.billing!.steps_per_unit,
      (one) => one.unit_count ?? one.message_count!,
    ),
    unused_share: meanOf(
      folds,
      (one) => one.billing!.unused_share,
      (one) => one.billing!.steps,
    ),
  };
}

/** The entropies of all folds as one entry: means of rates, sums of counts; orders that all of them have. */
function pooledEntropy(folds: readonly EntropyRecord[]): EntropyRecord {
  const [first] = folds;
  if (folds.length === 1 && first.data === undefined) return first;
  const mean = (of: (fold: EntropyRecord) => number): number => sumOf(folds, of) / folds.length;
  const orders = Math.min(...folds.map((one) => one.orders.length));
  const data = withoutFold(first.data ?? first.corpus);
  return {
    corpus: first.corpus,
    ...(data === first.corpus ? {} : { data }),
    contexts: first.contexts,
    orders: Array.from({ length: orders }, (_, k) =>
      pooledOrder(folds.map((one) => one.orders[k])),
    ),
    floor: {
      point: mean((one) => one.floor.point),
      low: mean((one) => one.floor.low),
      high: mean((one) => one.floor.high),
      method:
        folds.length === 1
          ? first.floor.method
          : `mean of ${folds.length} folds; ${first.floor.method}`,
      order: Math.min(...folds.map((one) => one.floor.order)),
      cut: folds.some((one) => one.floor.cut),
    },
  };
}

type OrderRecord = EntropyRecord['orders'][number];

function pooledOrder(folds: readonly OrderRecord[]): OrderRecord {
  const mean = (of: (fold: OrderRecord) => number): number => sumOf(folds, of) / folds.length;
  const sum = (of: (fold: OrderRecord) => number): number => sumOf(folds, of);
  const banded = folds.every((one) => one.low !== undefined && one.high !== undefined);
  return {
    k: folds[0].k,
    plug_in: mean((one) => one.plug_in),
    corrected: mean((one) => one.corrected),
    ...(banded ? { low: mean((one) => one.low!), high: mean((one) => one.high!) } : {}),
    positions: sum((one) => one.positions),
    contexts: sum((one) => one.contexts),
    pairs: sum((one) => one.pairs),
    estimable: folds.every((one) => one.estimable),
  };
}

/**
 * A run with the folds of each candidate pooled into one cell, whose id has no fold. Without folds the record as it is.
 */
export function pooledRun(record: RunRecord): PooledRun {
  const foldRates = new Map<string, readonly number[]>();
  if (!record.cells.some((cell) => cell.vary?.fold !== undefined)) return { record, foldRates };
  const cells = grouped(record.cells, (cell) => withoutFold(cell.id)).map((folds) => {
    const cell = pooledCell(folds);
    if (cell.verified && cell !== folds[0])
      foldRates.set(
        cell.id,
        folds.map((one) => one.rate!),
      );
    return cell;
  });
  const entropy = grouped(
    record.entropy,
    (one) => `${withoutFold(one.data ?? one.corpus)} ${one.contexts}`,
  ).map(pooledEntropy);
  return { record: { ...record, cells, entropy }, foldRates };
}

/** The plan's own cells and entropies: without what it varies, folds pooled. */
export function plainRun(record: RunRecord): PooledRun {
  const { record: pooled, foldRates } = pooledRun(record);
  return {
    record: {
      ...pooled,
      cells: pooled.cells.filter((cell) => cell.vary === undefined),
      entropy: pooled.entropy.filter((one) => one.data === undefined),
    },
    foldRates,
  };
}
