import { CONSTANT, numberOf, WEIGHT_ONE, weightCount } from './field-linear.ts';
import {
  BOUNDS,
  EARLIER_FIELD,
  EARLIER_VALUE,
  type FieldPlan,
  LAST_RESIDUAL,
  NO_CONTEXT,
} from './field-plan.ts';
import { LINEAR, residualOf, valueBeside, valueFrom, zigzagBetween } from './field-residual.ts';
import { bucketOf } from './field-token.ts';

/**
 * What a record's parts are expected to be, from the records before it in the message; the same at
 * both ends.
 *
 * For each part in turn: {@link tableOf}, then {@link split} or {@link join}; after the last part
 * {@link advance}. The whole state is `values`, the records before and `age`: small enough to copy.
 */
export class FieldPredictor {
  readonly plan: FieldPlan;
  /** Values of the record at hand. */
  readonly values: Uint32Array;
  /** Residuals of its parts so far. */
  readonly residuals: Uint32Array;
  readonly #transforms: Uint8Array;
  readonly #contexts: Uint8Array;
  readonly #contextParts: Uint16Array;
  readonly #tableStart: Uint32Array;
  readonly #shifts: Uint8Array;
  readonly #signed: Uint8Array;
  readonly #references: Uint32Array;
  readonly #before: Uint32Array;
  readonly #beforeThat: Uint32Array;
  readonly #lastResiduals: Uint32Array;
  readonly #firstParts: Int16Array;
  /** Of the part whose table was asked last. */
  #weightClass = 0;
  /** Records since the contexts began, at most 2. */
  #age = 0;

  constructor(plan: FieldPlan) {
    this.plan = plan;
    this.#transforms = plan.transforms;
    this.#contexts = plan.contexts;
    this.#contextParts = plan.contextParts;
    this.#tableStart = plan.tableStart;
    this.#shifts = plan.shifts;
    this.#signed = plan.layout.signed;
    this.#references = plan.references;
    this.#firstParts = plan.firstParts;
    this.values = new Uint32Array(plan.partCount);
    this.residuals = new Uint32Array(plan.partCount);
    this.#before = new Uint32Array(plan.partCount);
    this.#beforeThat = new Uint32Array(plan.partCount);
    this.#lastResiduals = new Uint32Array(plan.partCount);
  }

  /** Begins a message: no record before. */
  start(): void {
    this.#age = 0;
  }

  /** The table of the part; residuals of earlier parts are known. */
  tableOf(part: number): number {
    const table = this.#tableStart[part];
    if (this.#age === 0) return table;
    this.#weightClass = 0;
    const kind = this.#contexts[part];
    if (kind === NO_CONTEXT) return table + 1;
    if (kind === LAST_RESIDUAL)
      return this.#age === 1 ? table + 1 : table + 2 + bucketOf(this.#lastResiduals[part]);
    const asked = this.#contextParts[part];
    if (kind === EARLIER_FIELD) this.#weightClass = bucketOf(this.residuals[asked]);
    else
      this.#weightClass = this.#classOf(
        asked,
        kind === EARLIER_VALUE ? this.values[asked] : this.#before[asked],
      );
    return table + 1 + this.#weightClass;
  }

  /** The residual of `values[part]`; {@link tableOf} of the part came before. */
  split(part: number): number {
    const value = this.values[part];
    const shift = this.#shifts[part];
    let residual: number;
    if (this.#age === 0) residual = zigzagBetween(value, this.#firstOf(part), shift);
    else if (this.#transforms[part] === LINEAR)
      residual = zigzagBetween(value, this.#linear(part), shift);
    else
      residual = residualOf(
        this.#transforms[part],
        value,
        this.#before[part],
        this.#beforeThat[part],
        shift,
        this.#signed[part],
      );
    this.residuals[part] = residual;
    return residual;
  }

  /** Sets `values[part]` from its residual; {@link tableOf} of the part came before. */
  join(part: number, residual: number): void {
    const shift = this.#shifts[part];
    this.residuals[part] = residual;
    if (this.#age === 0) this.values[part] = valueBeside(residual, this.#firstOf(part), shift);
    else if (this.#transforms[part] === LINEAR)
      this.values[part] = valueBeside(residual, this.#linear(part), shift);
    else
      this.values[part] = valueFrom(
        this.#transforms[part],
        residual,
        this.#before[part],
        this.#beforeThat[part],
        shift,
        this.#signed[part],
      );
  }

  /** What a message's first value is expected to be. */
  #firstOf(part: number): number {
    const beside = this.#firstParts[part];
    if (beside < 0) return this.#references[part];
    return this.#references[part] + this.#numberOf(this.values, beside);
  }

  /** What a later value is expected to be under `linear`: see field-linear.ts. */
  #linear(part: number): number {
    const { inputs, inputStart, weights, weightStart } = this.plan;
    const from = inputStart[part];
    const to = inputStart[part + 1];
    let at = weightStart[part] + this.#weightClass * weightCount(to - from);
    const own = this.#numberOf(this.#before, part);
    let sum = CONSTANT * weights[at++];
    sum += (own - this.#numberOf(this.#beforeThat, part)) * weights[at++];
    for (let i = from; i < to; i++) {
      const input = inputs[i];
      const before = this.#numberOf(this.#before, input);
      const change =
        input < part
          ? this.#numberOf(this.values, input) - before
          : before - this.#numberOf(this.#beforeThat, input);
      sum += change * weights[at++];
      sum += (before - own) * weights[at++];
    }
    return own + Math.floor((sum + WEIGHT_ONE / 2) / WEIGHT_ONE);
  }

  #numberOf(values: Uint32Array, part: number): number {
    return numberOf(values[part], this.#shifts[part], this.#signed[part]);
  }

  /** Ends the record. */
  advance(): void {
    const { values, residuals } = this;
    const before = this.#before;
    const beforeThat = this.#beforeThat;
    const last = this.#lastResiduals;
    const first = this.#age === 0;
    for (let part = 0; part < values.length; part++) {
      beforeThat[part] = first ? values[part] : before[part];
      before[part] = values[part];
      last[part] = residuals[part];
    }
    if (this.#age < 2) this.#age++;
  }

  /** Class of a part's value: how many bounds it has reached. */
  #classOf(part: number, unordered: number): number {
    const { bounds, flips } = this.plan;
    const value = (unordered ^ flips[part]) >>> 0;
    const from = part * BOUNDS;
    let reached = value >= bounds[from + 3] ? 4 : 0;
    if (value >= bounds[from + reached + 1]) reached += 2;
    if (value >= bounds[from + reached]) reached++;
    return reached;
  }
}
