import type { MessagePairs } from '../harness/run-all.ts';
import type { CellRecord, RunRecord } from '../harness/run-record.ts';
import { blockSums, blocksFor, type ComparisonBlocks } from './comparison-blocks.ts';

/** A cell that is compared; where a plan has folds, one candidate's cells of all of them together. */
export interface Contender {
  /** The cell's id, without its fold. */
  readonly id: string;
  /** One, or one a fold, in the order of folds. */
  readonly cellIds: readonly string[];
  /** Bits per symbol. */
  readonly rate: number;
  /** Carried bits of each block. */
  readonly blockBits: Float64Array;
  /** Carried bits of each fold; one entry without folds. */
  readonly foldBits: Float64Array;
}

/** Cells that coded the same messages and so can be compared: those of a corpus that the plan varies in nothing but folds. */
export interface ContenderGroup {
  readonly corpus: string;
  /** What the plan varies, as it stands in the ids: `+train_share=0.1`; empty for most. */
  readonly variation: string;
  readonly blocks: ComparisonBlocks;
  /** Symbols of each block. */
  readonly blockSymbols: Float64Array;
  /** Least rate first; equal rates by id. */
  readonly contenders: readonly Contender[];
}

/** A cell's id taken apart. */
export function partsOfId(id: string): { base: string; variation: string; fold: number } {
  const found = /\+fold=(\d+)/.exec(id);
  const base = found === null ? id : id.replace(found[0], '');
  const mark = base.indexOf('+', base.lastIndexOf('/'));
  return {
    base,
    variation: mark < 0 ? '' : base.slice(mark),
    fold: found === null ? 0 : Number(found[1]),
  };
}

/**
 * Carried bits of each message, with what is sent once for all of them spread over all symbols: an alphabet map, and tables
 * sent under reset `never`. Where in the corpus they are carried is no property of the message there, and a resample that
 * draws it twice or not at all would take their cost for chance. The sum is the cell's carried bits.
 *
 * @param cell  verified
 */
export function comparedBits(cell: CellRecord, pairs: MessagePairs): Float64Array {
  const { bits, symbols } = pairs;
  let sum = 0;
  let symbolCount = 0;
  for (let i = 0; i < bits.length; i++) {
    sum += bits[i];
    symbolCount += symbols[i];
  }
  if (symbolCount === 0) return bits;
  const mapBits = cell.carried_bits! - sum;
  const once = cell.tables === 'sent' && cell.reset === 'never';
  const tableBits = once ? (cell.account?.tables ?? 0) - mapBits : 0;
  const perSymbol = (mapBits + tableBits) / symbolCount;
  const spread = bits.map((own, i) => own + perSymbol * symbols[i]);
  spread[0] -= tableBits;
  return spread;
}

/** Arrays one after another. */
export function joined(parts: readonly Float64Array[]): Float64Array {
  if (parts.length === 1) return parts[0];
  const all = new Float64Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    all.set(part, at);
    at += part.length;
  }
  return all;
}

const sumOf = (values: Float64Array): number => values.reduce((sum, value) => sum + value, 0);

/** The cells of one group, by id without fold, each with those of its folds in their order. */
type CellsByBase = Map<string, Map<number, CellRecord>>;

function cellsByGroup(record: RunRecord): Map<string, CellsByBase> {
  const groups = new Map<string, CellsByBase>();
  for (const cell of record.cells) {
    if (cell.reference) continue;
    const { base, variation, fold } = partsOfId(cell.id);
    const key = `${cell.corpus}/${variation}`;
    const group: CellsByBase = groups.get(key) ?? new Map();
    groups.set(key, group);
    group.set(base, (group.get(base) ?? new Map()).set(fold, cell));
  }
  return groups;
}

function blocksWithSymbols({ files = [] }: CellRecord): number {
  return files.filter((file) => file.symbol_count > 0).length;
}

function groupOf(
  cells: CellsByBase,
  messages: ReadonlyMap<string, MessagePairs>,
  sampled: ReadonlySet<string>,
): ContenderGroup | undefined {
  const folds = [...new Set([...cells.values()].flatMap((own) => [...own.keys()]))].sort(
    (a, b) => a - b,
  );
  const whole = [...cells].flatMap(([id, byFold]) => {
    const own = folds.map((fold) => byFold.get(fold));
    const ready = own.filter((cell) => cell?.verified === true && messages.has(cell.id));
    return ready.length === folds.length ? [{ id, cells: own as CellRecord[] }] : [];
  });
  if (whole.length === 0) return undefined;
  const symbolsOf = (cell: CellRecord): Float64Array => messages.get(cell.id)!.symbols;
  const symbols = joined(whole[0].cells.map(symbolsOf));
  const symbolCount = sumOf(symbols);
  if (symbolCount === 0) return undefined;
  const filled = whole[0].cells[0].unit_count !== undefined;
  const fewest = Math.min(
    ...whole.map((one) => one.cells.reduce((sum, cell) => sum + cell.message_count!, 0)),
  );
  // Of a sample each block stands as a file; those of the train part have no symbols.
  const sampleBlocks = sampled.has(whole[0].cells[0].corpus)
    ? whole[0].cells.reduce((sum, cell) => sum + blocksWithSymbols(cell), 0)
    : undefined;
  const blocks = blocksFor(symbols.length, filled ? fewest : undefined, sampleBlocks);
  const atLeastOne = { ...blocks, count: Math.max(1, blocks.count) };
  const contenders = whole.map((one): Contender => {
    const bits = one.cells.map((cell) => comparedBits(cell, messages.get(cell.id)!));
    const foldBits = Float64Array.from(bits, sumOf);
    return {
      id: one.id,
      cellIds: one.cells.map((cell) => cell.id),
      rate: sumOf(foldBits) / symbolCount,
      blockBits: blockSums(joined(bits), atLeastOne),
      foldBits,
    };
  });
  const first = whole[0].cells[0];
  return {
    corpus: first.corpus,
    variation: partsOfId(first.id).variation,
    blocks,
    blockSymbols: blockSums(symbols, atLeastOne),
    contenders: contenders.sort((a, b) => a.rate - b.rate || (a.id < b.id ? -1 : 1)),
  };
}

/**
 * The verified cells of a run that are no references, in groups within which they can be compared. A cell that failed in
 * one of the folds is left out, and so is one whose message figures are missing.
 *
 * @param messages  by cell id
 */
export function contenderGroups(
  record: RunRecord,
  messages: ReadonlyMap<string, MessagePairs>,
): ContenderGroup[] {
  const sampled = new Set(
    record.corpora.filter(({ sample }) => sample !== undefined).map(({ name }) => name),
  );
  return [...cellsByGroup(record).values()].flatMap(
    (cells) => groupOf(cells, messages, sampled) ?? [],
  );
}
