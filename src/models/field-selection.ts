import { type FieldChoice, type FieldContext, TRANSFORMS } from '../symbols/field-choice.ts';
import { type FieldColumns, factsOf } from './field-columns.ts';
import {
  BOUNDS,
  contextKindOf,
  type FieldFacts,
  orderedValue,
  tableCountOf,
} from './field-plan.ts';
import { residualOf, TRANSFORM_CODES, zigzagBetween } from './field-residual.ts';
import { bucketOf, EXTRA_BITS, tokenCount, tokenOf } from './field-token.ts';
import { quantiseTables, weighTables } from './field-weights.ts';
import { Quantiser } from './quantise.ts';
import { COST_PER_BIT, tableCosts } from './table-cost.ts';

/** A simpler choice stays unless another saves this. */
const LEAST_GAIN = 8 * COST_PER_BIT;

/**
 * A context asks one of so many parts right before its own: all of them in usual records, fewer
 * where a record has hundreds, so that the time stays near linear.
 */
const nearestEarlier = (partCount: number) =>
  Math.max(1, Math.min(32, Math.floor(1024 / partCount)));

/** What was chosen for a part. */
export interface FieldSelection {
  readonly choice: FieldChoice;
  /** Of the second half of the records under tables of the first, in 1/65536 bit. */
  readonly cost: number;
  /** The same of `raw` without context. */
  readonly plainCost: number;
}

/**
 * Transform and context of each part, by cost: tables of the first half of the records price the
 * second half.
 *
 * Parts are decided in the order of the record; a part may ask those before it ({@link
 * nearestEarlier}), as they were decided. Contexts are tried from none to the earlier fields, and
 * within each the transforms from `raw` to `delta2`: what comes first is the simpler and stays
 * unless {@link LEAST_GAIN} is saved. Integers only, so the choice is the same everywhere.
 *
 * Cost: 4 · records · parts · (contexts + 2) steps, and as many tables to quantise as contexts
 * have.
 */
export function selectFields(columns: FieldColumns): FieldSelection[] {
  const { layout } = columns;
  const selections: FieldSelection[] = [];
  const buckets: Uint8Array[] = [];
  const pricer = new Pricer(columns);
  const nearest = nearestEarlier(layout.partCount);
  for (let part = 0; part < layout.partCount; part++) {
    pricer.open(part);
    const contexts: FieldContext[] = [{ kind: 'none' }, { kind: 'last' }, { kind: 'value' }];
    for (let earlier = Math.max(0, part - nearest); earlier < part; earlier++)
      contexts.push({ kind: 'field', name: layout.names[earlier] });
    let best: FieldSelection | undefined;
    let plainCost = 0;
    for (const context of contexts) {
      for (const transform of TRANSFORMS) {
        const choice = { transform, context };
        const asked = context.kind === 'field' ? layout.names.indexOf(context.name) : -1;
        const cost = pricer.cost(choice, buckets[asked]);
        if (best === undefined) plainCost = cost;
        if (best === undefined || cost + LEAST_GAIN <= best.cost)
          best = { choice, cost, plainCost };
      }
    }
    selections.push(best!);
    buckets.push(pricer.bucketsOf(best!.choice));
  }
  return selections;
}

/** Prices one choice after another for one part at a time. */
class Pricer {
  readonly #columns: FieldColumns;
  readonly #half: number;
  readonly #quantiser = new Quantiser();
  readonly #costs = tableCosts();
  #part = 0;
  #facts: FieldFacts = { reference: 0, bounds: [] };
  /** Of each transform, as far as computed: token and size class of each record's residual. */
  #tokens: Uint8Array[] = [];
  #buckets: Uint8Array[] = [];
  #classes = new Uint8Array(0);

  constructor(columns: FieldColumns) {
    this.#columns = columns;
    this.#half = Math.floor(columns.recordCount / 2);
  }

  open(part: number): void {
    const { recordCount, values, layout } = this.#columns;
    this.#part = part;
    this.#facts = factsOf(this.#columns, part, this.#half);
    this.#tokens = [];
    this.#buckets = [];
    for (const transform of TRANSFORMS) this.#transform(TRANSFORM_CODES[transform]);
    this.#classes = new Uint8Array(recordCount);
    const width = layout.widths[part];
    const signed = layout.signed[part];
    for (let i = 0; i < recordCount; i++) {
      const value = orderedValue(values[part][i], width, signed);
      let reached = 0;
      while (reached < BOUNDS && value >= this.#facts.bounds[reached]) reached++;
      this.#classes[i] = reached;
    }
  }

  bucketsOf(choice: FieldChoice): Uint8Array {
    return this.#buckets[TRANSFORM_CODES[choice.transform]];
  }

  #transform(code: number): void {
    const { recordCount, ages, layout } = this.#columns;
    const values = this.#columns.values[this.#part];
    const shift = 32 - layout.widths[this.#part];
    const signed = layout.signed[this.#part];
    const tokens = new Uint8Array(recordCount);
    const buckets = new Uint8Array(recordCount);
    for (let i = 0; i < recordCount; i++) {
      let residual: number;
      if (ages[i] === 0) residual = zigzagBetween(values[i], this.#facts.reference, shift);
      else {
        const beforeThat = values[ages[i] === 1 ? i - 1 : i - 2];
        residual = residualOf(code, values[i], values[i - 1], beforeThat, shift, signed);
      }
      tokens[i] = tokenOf(residual);
      buckets[i] = bucketOf(residual);
    }
    this.#tokens[code] = tokens;
    this.#buckets[code] = buckets;
  }

  /** @param asked  size classes of the earlier part's residuals, under such a context */
  cost(choice: FieldChoice, asked: Uint8Array | undefined): number {
    const { recordCount, ages, layout } = this.#columns;
    const code = TRANSFORM_CODES[choice.transform];
    const tokens = this.#tokens[code];
    const size = tokenCount(layout.widths[this.#part]);
    const tables = tableCountOf(contextKindOf(choice));
    const classes = this.#classesFor(choice, code, asked);
    const trained = new Float64Array(tables * size);
    const priced = new Float64Array(tables * size);
    for (let i = 0; i < recordCount; i++) {
      const table = ages[i] === 0 ? 0 : 1 + classes[i];
      const counts = i < this.#half ? trained : priced;
      counts[table * size + tokens[i]]++;
    }
    const weights = new Float64Array(tables * size);
    const frequencies = new Uint32Array(tables * size);
    weighTables(trained, weights, 0, tables, size);
    quantiseTables(this.#quantiser, weights, frequencies, 0, tables, size);
    let cost = 0;
    for (let slot = 0; slot < priced.length; slot++) {
      if (priced[slot] === 0) continue;
      const extra = EXTRA_BITS[slot % size] * COST_PER_BIT;
      cost += priced[slot] * (this.#costs[frequencies[slot]] + extra);
    }
    return cost;
  }

  /** For each record that is not a message's first the number of its table, less one. */
  #classesFor(choice: FieldChoice, code: number, asked: Uint8Array | undefined): Uint8Array {
    const { recordCount, ages } = this.#columns;
    if (asked !== undefined) return asked;
    const classes = new Uint8Array(recordCount);
    const { kind } = choice.context;
    if (kind === 'last') {
      const buckets = this.#buckets[code];
      for (let i = 1; i < recordCount; i++) classes[i] = ages[i] === 1 ? 0 : 1 + buckets[i - 1];
    } else if (kind === 'value') {
      for (let i = 1; i < recordCount; i++) classes[i] = this.#classes[i - 1];
    }
    return classes;
  }
}
