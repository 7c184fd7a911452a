import { symbolWidth } from '../coders/fixed.ts';
import type { CellRecord, CorpusRecord, EntropyRecord, RunRecord } from '../harness/run-record.ts';
import { cellTable } from './cell-table.ts';
import { delayNote, operationsNote } from './cost-lines.ts';
import { fieldLines } from './field-lines.ts';
import {
  countText,
  decimalsFor,
  padLeft,
  padRight,
  rateText,
  sizeText,
  symbolNoun,
  wrapText,
} from './figures.ts';
import { bestCell, cellPhrase, cellsOfCorpus, entropyOf, floorRateOf } from './floor-lines.ts';
import { messageLines } from './message-lines.ts';
import { tableSetLines } from './table-set-lines.ts';
import { timeLines } from './time-lines.ts';

export interface SectionOptions {
  readonly columns: number;
  /** Ranks by cell id, where the cells were compared. */
  readonly rankOf?: ReadonlyMap<string, number>;
  /** Rates of each fold by cell id, where cells are means over folds. */
  readonly foldRates?: ReadonlyMap<string, readonly number[]>;
  /** Lines after the table of cells. */
  readonly after?: readonly string[];
  /** Tell how the sizes of messages spread, where there are several. */
  readonly messages?: boolean;
  /** Tell more of times than the speeds in the table of cells, where there is room. */
  readonly times?: boolean;
}

function floorRemark({ floor }: EntropyRecord, decimals: number): string {
  const enough =
    floor.order < 0
      ? 'no order is estimable from so few symbols of so large an alphabet'
      : floor.cut
        ? `order ${floor.order} is not enough for this source`
        : `order ${floor.order} is estimable`;
  if (floor.low === floor.high) {
    return `the lowest that a coder reached; the true one may be lower, since ${enough}`;
  }
  return `band ${rateText(floor.low, decimals)} to ${rateText(floor.high, decimals)}; ${enough}`;
}

/** The three figures that matter of one corpus: what it takes now, the best cell tried, the floor. */
function headLines(record: RunRecord, corpus: CorpusRecord, options: SectionOptions): string[] {
  const noun = symbolNoun(corpus.symbols_as);
  const cells = cellsOfCorpus(record, corpus);
  const tried = cells.filter((c) => c.verified && !c.reference).length;
  const best = bestCell(cells);
  const n = corpus.symbol_count;
  const decimals = decimalsFor(best?.rate ?? 1);
  const rows: [string, string, string, string][] = [];
  const width = symbolWidth(corpus.alphabet_size);
  rows.push([
    'at a fixed width',
    `${rateText(width, decimals)} bits/${noun}`,
    sizeText((width * n) / 8),
    '',
  ]);
  if (best !== undefined) {
    rows.push([
      `best of ${tried} tried`,
      rateText(best.rate!, decimals),
      sizeText((best.rate! * n) / 8),
      cellPhrase(best),
    ]);
  }
  const entropy =
    best === undefined
      ? record.entropy.find((e) => e.corpus === corpus.name)
      : entropyOf(record, best);
  if (entropy !== undefined) {
    const { point } = entropy.floor;
    rows.push([
      'floor, an estimate',
      `≈ ${rateText(point, decimals)}`,
      sizeText((point * n) / 8),
      floorRemark(entropy, decimals),
    ]);
  }
  const first = Math.max(...rows.map((r) => r[0].length));
  const figures = rows.map((r) => /^(≈ )?([\d.−]+)(.*)$/.exec(r[1])!);
  const whole = Math.max(...figures.map((f) => f[2].length + 2));
  const rest = Math.max(...figures.map((f) => f[3].length));
  const size = Math.max(...rows.map((r) => r[2].length));
  return rows.flatMap((r, i) => {
    const figure =
      padLeft(`${figures[i][1] ?? ''}${figures[i][2]}`, whole) + padRight(figures[i][3], rest);
    const start = ` ${padRight(r[0], first)}  ${figure}  ${padLeft(r[2], size)}`;
    if (r[3] === '') return [start.trimEnd()];
    if (start.length + 3 + r[3].length <= options.columns) return [`${start}   ${r[3]}`];
    return [start, ...wrapText(r[3], options.columns, '   ')];
  });
}

/** Remarks that a reader needs to use the figures rightly; each one line or paragraph. */
function remarks(record: RunRecord, corpus: CorpusRecord): string[] {
  const notes: string[] = [];
  const cells = cellsOfCorpus(record, corpus).filter((c) => c.verified);
  const best = bestCell(cells);
  if (corpus.train_symbol_count > 0) {
    if (corpus.folds !== undefined) {
      notes.push(
        `Coded: ${corpus.folds} blocks one after another, ${countText(corpus.symbol_count)} symbols in ${countText(corpus.message_count)} ${corpus.unit_count === undefined ? 'messages' : 'units'}, each with tables trained on all others, later ones too; rates are means over all symbols.`,
      );
    } else
      notes.push(
        `Coded: the test part, ${countText(corpus.symbol_count)} symbols in ${countText(corpus.message_count)} ${corpus.unit_count === undefined ? 'messages' : 'units'}; ` +
          `trained on ${countText(corpus.train_symbol_count)} symbols (${record.plan.split}).`,
      );
    if ((corpus.repeated_share ?? 0) >= 0.01) {
      const without =
        best?.rate_without_repeats === undefined
          ? ''
          : `; without them the best rate is ${rateText(best.rate_without_repeats)}`;
      notes.push(
        `${Math.round(corpus.repeated_share! * 100)} % of the test ${corpus.unit_count === undefined ? 'messages' : 'units'} also occur in train${without}.`,
      );
    }
  }
  if (corpus.fill_bytes !== undefined) {
    notes.push(
      `Each message holds as many whole units as fit into ${countText(corpus.fill_bytes)} coded bytes, all counted, so each candidate cuts messages of its own. A flipped bit can spoil a whole message and all its units; the link's own protection and your standards decide whether that is tolerable.`,
    );
  }
  const device = record.plan.product?.device;
  notes.push(...tableSetLines(cells, symbolNoun(corpus.symbols_as), device));
  const operations =
    device === undefined || best === undefined
      ? undefined
      : operationsNote(best, device, symbolNoun(corpus.symbols_as));
  if (operations !== undefined) notes.push(operations);
  const delay = delayNote(cells, corpus);
  if (delay !== undefined) notes.push(delay);
  const reference = cells.find((c) => c.reference && best !== undefined && c.rate! < best.rate!);
  if (reference !== undefined) {
    notes.push(
      `${cellPhrase(reference)}, a reference, needs less than every candidate: these data repeat in ways that the contexts tried here do not see.`,
    );
  }
  const dependent = cells.filter((c) => !c.decodes_alone && (c.message_count ?? 0) > 1);
  if (dependent.length > 0) {
    notes.push(
      `Under reset ${[...new Set(dependent.map((c) => c.reset))].join(' and ')} a message needs all earlier messages: one lost message spoils those after it.`,
    );
  }
  for (const entropy of record.entropy.filter((e) => e.corpus === corpus.name)) {
    const order = entropy.orders.find((o) => o.k === entropy.floor.order);
    const low = order?.low;
    const below = cells
      .filter((c) => entropyOf(record, c) === entropy && low !== undefined && c.rate! < low)
      .sort((a, b) => a.rate! - b.rate!)[0];
    if (order !== undefined && below !== undefined) {
      notes.push(
        `${cellPhrase(below)} needs ${rateText(below.rate!)}, below the corrected entropy of order ${order.k} (${rateText(order.corrected)}) and below its whole interval: as a floor that estimate was wrong, so the band ends at what coders reach.`,
      );
    }
  }
  for (const wide of cells) {
    const n = wide.params['n'];
    if (wide.coder !== 'block-huffman' || typeof n !== 'number' || wide.tables !== 'sent') continue;
    const narrow = cells.find(
      (c) =>
        c.coder === 'block-huffman' &&
        c.params['n'] === n - 1 &&
        c.tables === 'sent' &&
        c.reset === wide.reset,
    );
    const plain =
      n === 2
        ? cells.find(
            (c) => c.candidate === 'huffman' && c.tables === 'sent' && c.reset === wide.reset,
          )
        : undefined;
    const other = narrow ?? plain;
    if (other !== undefined && wide.carried_bits! > other.carried_bits!) {
      notes.push(
        `${wide.candidate}: its table (${sizeText((wide.account?.tables ?? 0) / 8)}) no longer pays; ${other.candidate} needs less in all.`,
      );
    }
  }
  return notes;
}

/** Which field costs what, of the best cell that was coded by fields. */
function bestFieldLines(
  cells: readonly CellRecord[],
  corpus: CorpusRecord,
  columns: number,
): string[] {
  const best = bestCell(cells.filter((cell) => cell.fields !== undefined));
  if (best === undefined || corpus.record_bytes === undefined) return [];
  return [...fieldLines(best, corpus.record_bytes, columns), ''];
}

/** One corpus on a terminal: head, table of cells, the fields of a record, remarks. */
export function corpusSection(
  record: RunRecord,
  corpus: CorpusRecord,
  options: SectionOptions,
): string[] {
  const { columns } = options;
  const cells = cellsOfCorpus(record, corpus);
  if (corpus.symbol_count === 0) return [' No symbols: nothing to code, 0 bits exactly.'];
  return [
    ...headLines(record, corpus, options),
    '',
    ...cellTable(cells, {
      columns,
      noun: symbolNoun(corpus.symbols_as),
      floorOf: (cell) => floorRateOf(record, cell),
      ...(record.plan.product === undefined ? {} : { device: record.plan.product.device }),
      ...(options.rankOf === undefined ? {} : { rankOf: options.rankOf }),
      ...(options.foldRates === undefined ? {} : { foldRates: options.foldRates }),
    }),
    ...(options.after ?? []),
    '',
    ...(options.messages ? messageLines(cells, columns) : []),
    ...(options.times ? timeLines(cells, symbolNoun(corpus.symbols_as), columns) : []),
    ...bestFieldLines(cells, corpus, columns),
    ...remarks(record, corpus).flatMap((note) => wrapText(note, columns - 1, ' ')),
  ];
}
