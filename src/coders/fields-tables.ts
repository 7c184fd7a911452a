import { BugError } from '../errors/errors.ts';
import { columnsOf } from '../models/field-columns.ts';
import { AdaptiveFieldTables } from '../models/field-counts.ts';
import { FieldPlan } from '../models/field-plan.ts';
import { FieldPredictor } from '../models/field-predictor.ts';
import { codeRecord, countRecord } from '../models/field-records.ts';
import { type FieldSelection, selectFields } from '../models/field-selection.ts';
import { trainedFacts } from '../models/field-series.ts';
import { EXTRA_BITS } from '../models/field-token.ts';
import { quantiseTables, weighTables } from '../models/field-weights.ts';
import { Quantiser } from '../models/quantise.ts';
import { COST_PER_BIT, tableCosts } from '../models/table-cost.ts';
import { Meter } from '../stages/meter.ts';
import type { RecordLayout } from '../symbols/record-layout.ts';
import type { Setup, Tables, Trainer } from './contract.ts';
import { TrainRecords } from './fields-records.ts';
import { type FieldsSettings, untrainedPlan } from './fields-settings.ts';

/**
 * Choices, references and size classes are made on the last of the train records: so many values at
 * most.
 */
const MOST_VALUES = 2 ** 20;

/**
 * Under `fill`, contexts begin at one of so many units of the train split, as if messages held so
 * many; once tables are known, at as many as a message then holds.
 */
const UNITS_A_START = 8;
const MOST_UNITS_A_START = 256;

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

/** Messages of the train split from one begin of contexts to the next, before tables are known. */
function firstStartEvery(setup: Setup): number {
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
  const train = new TrainRecords(layout);
  return {
    push: (chunk) => train.pieces.push(chunk),
    finish: (): FieldsTables => {
      train.pieces.finish();
      const { bytes } = train;
      const starts = train.starts(firstStartEvery(setup));
      const most = Math.max(256, Math.floor(MOST_VALUES / layout.partCount));
      const from = Math.max(0, starts.length - most);
      const columns = columnsOf(layout, bytes.subarray(from * layout.bytes), starts.subarray(from));
      const given = settings.choicesFor(setup, layout);
      const selections = given === undefined ? selectFields(columns) : undefined;
      const choices = given ?? selections!.map(({ choice }) => choice);
      const plan = new FieldPlan(layout, choices, trainedFacts(columns, choices));
      const trained = { coder: 'fields' as const, plan, ...(selections && { selections }) };
      if (setup.policy === 'primed')
        return { ...trained, policy: 'primed', tables: learnAll(plan, bytes, starts) };
      let counts = countAll(plan, bytes, starts);
      if (setup.fill !== undefined && starts.length > 0) {
        const units = unitsAMessage(plan, counts, setup.fill.bytes, train.unitCount);
        counts = countAll(plan, bytes, train.starts(units));
      }
      const weights = weighAll(plan, counts);
      return { ...trained, policy: 'shipped', weights, frequencies: quantiseAll(plan, weights) };
    },
  };
}

/** Units that a message of so many bytes holds on average, by the cost of the train split. */
function unitsAMessage(
  plan: FieldPlan,
  counts: Float64Array,
  messageBytes: number,
  unitCount: number,
): number {
  const frequencies = quantiseAll(plan, weighAll(plan, counts));
  const costs = tableCosts();
  let cost = 0;
  for (let table = 0; table < plan.tableCount; table++) {
    const from = plan.slotStart[table];
    for (let slot = from; slot < plan.slotStart[table + 1]; slot++)
      cost += counts[slot] * (costs[frequencies[slot]] + EXTRA_BITS[slot - from] * COST_PER_BIT);
  }
  const units = Math.floor((8 * messageBytes * COST_PER_BIT * unitCount) / Math.max(1, cost));
  return Math.max(1, Math.min(MOST_UNITS_A_START, units));
}

/** Counts of all slots. */
function countAll(plan: FieldPlan, bytes: Uint8Array, starts: Uint8Array): Float64Array {
  const predictor = new FieldPredictor(plan);
  const counts = new Float64Array(plan.slotCount);
  for (let record = 0; record < starts.length; record++) {
    if (starts[record] === 1) predictor.start();
    countRecord(predictor, counts, bytes, record * plan.layout.bytes);
  }
  return counts;
}

/** Smoothed counts of all slots. */
function weighAll(plan: FieldPlan, counts: Float64Array): Float64Array {
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
