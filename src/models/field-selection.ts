import {
  type FieldChoice,
  type FieldContext,
  MOST_INPUTS,
  TRANSFORMS,
} from '../symbols/field-choice.ts';
import { distanceBeside, type FieldColumns } from './field-columns.ts';
import { fitWeights, NormalEquations } from './field-least-squares.ts';
import { columnsOfInputs, linearRows, rowsOfInputs } from './field-linear.ts';
import { contextKindOf, weightClassesOf } from './field-plan.ts';
import { FieldPricer, trainingRecords } from './field-pricer.ts';
import { FieldSeries, type Residuals } from './field-series.ts';
import { COST_PER_BIT } from './table-cost.ts';

/** A simpler choice stays unless another saves this. */
const LEAST_GAIN = 8 * COST_PER_BIT;

/** `linear` must besides save this part of the cost, since it has more to keep and to compute. */
const LINEAR_SHARE = 128;

/** A first value is coded beside another field where that saves this part of the cost. */
const FIRST_SHARE = 16;

/** `linear` is tried with so many of the contexts that did best without it. */
const LINEAR_CONTEXTS = 3;

/** Weights are fitted, while choosing, to at most so many of the records. */
const LINEAR_RECORDS = 8192;

/**
 * A choice asks one of so many parts on each side of its own: all of them in usual records, fewer
 * where a record has hundreds, so that the time stays near linear.
 */
const nearest = (partCount: number, most: number) =>
  Math.max(1, Math.min(most, Math.floor(1024 / partCount)));

/** What was chosen for a part. */
export interface FieldSelection {
  readonly choice: FieldChoice;
  /** Of every other run of records under tables of the others, in 1/65536 bit. */
  readonly cost: number;
  /** The same of `raw` without context. */
  readonly plainCost: number;
}

/**
 * Transform and context of each part, by cost: tables and weights of every other run of records
 * price the others ({@link trainingRecords}).
 *
 * Parts are decided in the order of the record; a part may ask those around it ({@link nearest}),
 * those before it as they were decided. First that beside which a message's first value is coded;
 * then contexts from none to other fields, and within each the transforms from `raw` to `delta2`;
 * then `linear`, its inputs found one after another by least squares. What comes first is the
 * simpler and stays unless {@link LEAST_GAIN} is saved. The choice is the same everywhere: costs are
 * integers, and least squares are computed in a fixed order.
 *
 * Cost: 4 · records · parts · contexts steps, as many tables to quantise as contexts have, and for
 * `linear` about 2000 multiplications for each record and part.
 */
export function selectFields(columns: FieldColumns): FieldSelection[] {
  const trains = trainingRecords(columns.recordCount);
  const known = Uint32Array.from(trains.keys()).filter((record) => trains[record] === 1);
  const series = new FieldSeries(columns, known);
  const pricer = new FieldPricer(series, trains);
  return columns.values.map((_, part) => new PartSearch(series, pricer, known, part).run());
}

/** Finds the choice for one part. */
class PartSearch {
  readonly #series: FieldSeries;
  readonly #pricer: FieldPricer;
  readonly #known: Uint32Array;
  readonly #part: number;
  #first: { readonly name?: string; readonly tokens: Uint8Array };
  #best: { choice: FieldChoice; cost: number; residuals: Residuals } | undefined;

  constructor(series: FieldSeries, pricer: FieldPricer, known: Uint32Array, part: number) {
    this.#series = series;
    this.#pricer = pricer;
    this.#known = known;
    this.#part = part;
    this.#first = { tokens: series.firstTokens(part, series.facts[part].reference, undefined) };
  }

  run(): FieldSelection {
    const plain = TRANSFORMS.map((transform) => this.#series.plain(this.#part, transform));
    const plainCost = this.#pricer.cost(this.#part, this.#first.tokens, plain[0], { kind: 'none' });
    this.#chooseFirst();
    const tried = this.#contexts().map((context) => {
      const costs = TRANSFORMS.map((transform, i) =>
        this.#try(transform, undefined, context, plain[i], LEAST_GAIN),
      );
      return { context, cost: Math.min(...costs) };
    });
    tried.sort((a, b) => a.cost - b.cost);
    this.#tryLinear(tried.slice(0, LINEAR_CONTEXTS).map(({ context }) => context));
    const { choice, cost, residuals } = this.#best!;
    this.#series.decide(this.#part, residuals);
    return { choice, cost, plainCost };
  }

  /** Keeps what is tried where it saves enough; gives back its cost. */
  #try(
    transform: FieldChoice['transform'],
    inputs: readonly string[] | undefined,
    context: FieldContext,
    residuals: Residuals,
    leastGain: number,
  ): number {
    const cost = this.#pricer.cost(this.#part, this.#first.tokens, residuals, context);
    if (this.#best !== undefined && cost + leastGain > this.#best.cost) return cost;
    const { name } = this.#first;
    const choice: FieldChoice = {
      transform,
      ...(inputs !== undefined && inputs.length > 0 && { inputs }),
      context,
      ...(name !== undefined && { first: name }),
    };
    this.#best = { choice, cost, residuals };
    return cost;
  }

  /**
   * Whether a first value is better coded beside that of an earlier field: judged as if each record
   * were a message's first, since those are few, and then by them alone.
   */
  #chooseFirst(): void {
    const part = this.#part;
    const { columns } = this.#series;
    const { names } = columns.layout;
    const alone = this.#first.tokens;
    let best = this.#pricer.firstCost(part, alone, true);
    const own = this.#pricer.firstCost(part, alone, false);
    for (const beside of this.#around().filter((other) => other < part)) {
      const reference = distanceBeside(columns, part, this.#known, beside);
      const tokens = this.#series.firstTokens(part, reference, beside);
      const cost = this.#pricer.firstCost(part, tokens, true);
      if (cost + LEAST_GAIN + Math.floor(best / FIRST_SHARE) > best) continue;
      if (this.#pricer.firstCost(part, tokens, false) > own) continue;
      best = cost;
      this.#first = { name: names[beside], tokens };
    }
  }

  /** Other parts that may be asked, in the order of the record. */
  #around(most = 32): number[] {
    const { partCount } = this.#series.columns.layout;
    const reach = nearest(partCount, most);
    const parts: number[] = [];
    const to = Math.min(partCount - 1, this.#part + reach);
    for (let part = Math.max(0, this.#part - reach); part <= to; part++)
      if (part !== this.#part) parts.push(part);
    return parts;
  }

  #contexts(): FieldContext[] {
    const { names } = this.#series.columns.layout;
    const around = this.#around();
    const earlier = around.filter((part) => part < this.#part);
    const ask = (kind: 'field' | 'at' | 'was', parts: readonly number[]): FieldContext[] =>
      parts.map((part) => ({ kind, name: names[part] }));
    return [
      { kind: 'none' },
      { kind: 'last' },
      { kind: 'value' },
      ...ask('field', earlier),
      ...ask('at', earlier),
      ...ask('was', around),
    ];
  }

  #tryLinear(contexts: readonly FieldContext[]): void {
    const { columns } = this.#series;
    const { names } = columns.layout;
    const around = this.#around(8);
    const step = Math.max(1, Math.ceil(this.#known.length / LINEAR_RECORDS));
    const fitted = this.#known.filter((_, i) => i % step === 0);
    const rows = linearRows(columns, this.#part, around, fitted);
    const always: FieldContext[] = [{ kind: 'none' }, { kind: 'last' }];
    const others = contexts.filter(({ kind }) => kind !== 'none' && kind !== 'last');
    for (const context of [...always, ...others]) {
      const classes = this.#series.contextClasses(this.#part, context);
      const classCount = weightClassesOf(contextKindOf({ transform: 'linear', context }));
      const equations = new NormalEquations(rows, classes, classCount);
      const places: number[] = [];
      for (;;) {
        const { weights } = equations.solve(columnsOfInputs(places));
        const inputs = places.map((place) => around[place]);
        const wholeWeights = fitWeights(rowsOfInputs(rows, places), classes, classCount, weights);
        const residuals = this.#series.linear(this.#part, inputs, wholeWeights, classes);
        const asked = inputs.map((part) => names[part]);
        const gain = LEAST_GAIN + Math.floor(this.#best!.cost / LINEAR_SHARE);
        this.#try('linear', asked, context, residuals, gain);
        if (places.length === MOST_INPUTS || places.length === around.length) break;
        places.push(nextInput(equations, places, around.length));
      }
    }
  }
}

/** The place of the input that lowers the sum of squares most beside those at `places`. */
function nextInput(equations: NormalEquations, places: readonly number[], count: number): number {
  let best = -1;
  let most = Number.NEGATIVE_INFINITY;
  for (let place = 0; place < count; place++) {
    if (places.includes(place)) continue;
    const { lowered } = equations.solve(columnsOfInputs([...places, place]));
    if (lowered <= most) continue;
    most = lowered;
    best = place;
  }
  return best;
}
