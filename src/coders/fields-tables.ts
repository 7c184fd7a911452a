import { BugError, InputError } from '../errors/errors.ts';
import { columnsOf, type FieldColumns, factsOf } from '../models/field-columns.ts';
import { AdaptiveFieldTables } from '../models/field-counts.ts';
import { FieldPlan } from '../models/field-plan.ts';
import { FieldPredictor } from '../models/field-predictor.ts';
import { codeRecord, countRecord } from '../models/field-records.ts';
import { type FieldSelection, selectFields } from '../models/field-selection.ts';
import { quantiseTables, weighTables } from '../models/field-weights.ts';
import { Quantiser } from '../models/quantise.ts';
import { Meter } from '../stages/meter.ts';
import type { RecordLayout } from '../symbols/record-layout.ts';
import type { Setup, Tables, Trainer } from './contract.ts';
import { type FieldsSettings, untrainedPlan } from './fields-settings.ts';
import { MessagePieces } from './message-pieces.ts';

/**
 * Choices, references and size classes are made on the last of the train records: so many values at
 * most.
 */
const MOST_VALUES = 2 ** 20;

/** Under `fill`, contexts begin at one of so many units of the train split, as if messages held so many. */
const UNITS_A_START = 8;

interface TrainedPlan {
  readonly coder: 'fields';
  readonly plan: FieldPlan;
  /** What `auto` found, one a part; absent where choices were given. */
  readonly selections?: readonly FieldSelection[];
}

/** What `fields` is trained to. */
export type FieldsTables =
  | (TrainedPlan & {
      readonly policy: 'shipped';
      /** Of all slots: smoothed counts, and the same at totals of 2^14. */
      readonly weights: Float64Array;
      readonly frequencies: Uint32Array;
    })
  | (TrainedPlan & { readonly policy: 'primed'; readonly tables: AdaptiveFieldTables });

/** The tables that a setup's policy needs; a missing or foreign set is our own bug. */
export function tablesFor<P extends FieldsTables['policy']>(
  setup: Setup,
  policy: P,
): Extract<FieldsTables, { policy: P }> {
  const tables = setup.tables as FieldsTables | undefined;
  if (tables?.coder !== 'fields' || tables.policy !== policy) {
    throw new BugError(`fields was given no tables for ${policy}`, {
      got: tables === undefined ? 'none' : `tables of ${(tables as Tables).coder}`,
    });
  }
  return tables as Extract<FieldsTables, { policy: P }>;
}

/** The plan and adaptive tables that both ends of a unit start with. */
export function adaptiveTablesFor(
  settings: FieldsSettings,
  setup: Setup,
): { plan: FieldPlan; tables: AdaptiveFieldTables } {
  if (setup.policy === 'primed') {
    const { plan, tables } = tablesFor(setup, 'primed');
    return { plan, tables: new AdaptiveFieldTables(plan, tables) };
  }
  const layout = settings.layoutOf(setup);
  const choices = settings.choicesFor(setup, layout);
  if (choices === undefined) throw new BugError('fields has no choices and no train split');
  const plan = untrainedPlan(layout, choices);
  return { plan, tables: new AdaptiveFieldTables(plan) };
}

/** Whether contexts begin anew at each message. */
export const startsAtMessages = (setup: Setup): boolean =>
  setup.policy === 'shipped' || setup.reset === 'message';

/** What is written of a message's length is the number of its records, where units are not counted. */
export const countedInRecords = (setup: Setup, layout: RecordLayout): Setup => ({
  ...setup,
  unitSymbols: setup.unitSymbols ?? layout.bytes,
});

/** Number of records in a message of so many bytes. Throws InputError for a part of one. */
export function recordCountOf(symbolCount: number, layout: RecordLayout): number {
  const over = symbolCount % layout.bytes;
  if (over === 0) return symbolCount / layout.bytes;
  throw new InputError('fields: a message is not a whole number of records', {
    coder: 'fields',
    key: 'messages',
    expected: `a multiple of ${layout.bytes} bytes, the size of one record`,
    got: `${symbolCount} bytes`,
    advice: 'Cut messages by records, as in messages: records=8.',
  });
}

/** Messages of the train split from one begin of contexts to the next. */
function startEvery(setup: Setup): number {
  if (!startsAtMessages(setup)) return Number.POSITIVE_INFINITY;
  return setup.fill === undefined ? 1 : UNITS_A_START;
}

/**
 * A trainer for the policies that have tables. It keeps the train split until the end, since
 * choices come before counts.
 *
 * The choices are made on the last records, at most {@link MOST_VALUES} values of them: those
 * nearest to what will be coded.
 */
export function fieldsTrainer(settings: FieldsSettings, setup: Setup): Trainer {
  const layout = settings.layoutOf(setup);
  const train = new TrainRecords(layout, startEvery(setup));
  return {
    push: (chunk) => train.pieces.push(chunk),
    finish: (): FieldsTables => {
      train.pieces.finish();
      const { bytes, starts } = train.finish();
      const most = Math.max(256, Math.floor(MOST_VALUES / layout.partCount));
      const from = Math.max(0, starts.length - most);
      const columns = columnsOf(layout, bytes.subarray(from * layout.bytes), starts.subarray(from));
      const given = settings.choicesFor(setup, layout);
      const selections = given === undefined ? selectFields(columns) : undefined;
      const choices = given ?? selections!.map(({ choice }) => choice);
      const plan = new FieldPlan(layout, choices, factsOfAll(columns));
      const trained = { coder: 'fields' as const, plan, ...(selections && { selections }) };
      if (setup.policy === 'primed')
        return { ...trained, policy: 'primed', tables: learnAll(plan, bytes, starts) };
      const weights = countAll(plan, bytes, starts);
      return { ...trained, policy: 'shipped', weights, frequencies: quantiseAll(plan, weights) };
    },
  };
}

const factsOfAll = (columns: FieldColumns) =>
  columns.values.map((_, part) => factsOf(columns, part, columns.recordCount));

/** Smoothed counts of all slots. */
function countAll(plan: FieldPlan, bytes: Uint8Array, starts: Uint8Array): Float64Array {
  const predictor = new FieldPredictor(plan);
  const counts = new Float64Array(plan.slotCount);
  for (let record = 0; record < starts.length; record++) {
    if (starts[record] === 1) predictor.start();
    countRecord(predictor, counts, bytes, record * plan.layout.bytes);
  }
  const weights = new Float64Array(plan.slotCount);
  forEachPart(plan, (from, tables, tokens) => weighTables(counts, weights, from, tables, tokens));
  return weights;
}

function quantiseAll(plan: FieldPlan, weights: Float64Array): Uint32Array {
  const frequencies = new Uint32Array(plan.slotCount);
  const quantiser = new Quantiser();
  forEachPart(plan, (from, tables, tokens) =>
    quantiseTables(quantiser, weights, frequencies, from, tables, tokens),
  );
  return frequencies;
}

/** First slot, number of tables and tokens of each part. */
function forEachPart(
  { partCount, tableStart, slotStart }: FieldPlan,
  visit: (from: number, tables: number, tokens: number) => void,
): void {
  for (let part = 0; part < partCount; part++) {
    const table = tableStart[part];
    const from = slotStart[table];
    visit(from, tableStart[part + 1] - table, slotStart[table + 1] - from);
  }
}

/** Adaptive tables after all records, coded without a stage. */
function learnAll(plan: FieldPlan, bytes: Uint8Array, starts: Uint8Array): AdaptiveFieldTables {
  const predictor = new FieldPredictor(plan);
  const tables = new AdaptiveFieldTables(plan);
  const sink = new Meter();
  for (let record = 0; record < starts.length; record++) {
    if (starts[record] === 1) predictor.start();
    codeRecord(predictor, tables, bytes, record * plan.layout.bytes, sink);
  }
  return tables;
}

/** The train split, gathered from chunks. */
class TrainRecords {
  readonly pieces: MessagePieces;
  readonly #layout: RecordLayout;
  #bytes = new Uint8Array(1 << 12);
  #filled = 0;
  readonly #firstRecords: number[] = [];

  /** @param startEvery  contexts begin at the first message, and then at each of so many */
  constructor(layout: RecordLayout, startEvery: number) {
    this.#layout = layout;
    let left = 0;
    this.pieces = new MessagePieces({
      begin: (symbolCount) => {
        recordCountOf(symbolCount, layout);
        if (left === 0) {
          this.#firstRecords.push(this.#filled / layout.bytes);
          left = startEvery;
        }
        left--;
      },
      take: (symbols, from, to) => {
        const end = this.#filled + to - from;
        if (end > this.#bytes.length) {
          const grown = new Uint8Array(Math.max(end, 2 * this.#bytes.length));
          grown.set(this.#bytes);
          this.#bytes = grown;
        }
        this.#bytes.set(symbols.subarray(from, to), this.#filled);
        this.#filled = end;
      },
      end: () => {},
    });
  }

  /** All records, and for each 1 where contexts begin. */
  finish(): { bytes: Uint8Array; starts: Uint8Array } {
    const count = this.#filled / this.#layout.bytes;
    const starts = new Uint8Array(count);
    for (const record of this.#firstRecords) if (record < count) starts[record] = 1;
    if (count > 0) starts[0] = 1;
    return { bytes: this.#bytes.subarray(0, this.#filled), starts };
  }
}
