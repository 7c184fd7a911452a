import { BOUNDS, EARLIER_FIELD, type FieldPlan, LAST_RESIDUAL, LAST_VALUE } from './field-plan.ts';
import { residualOf, valueBeside, valueFrom, zigzagBetween } from './field-residual.ts';
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
    const kind = this.#contexts[part];
    if (kind === EARLIER_FIELD)
      return table + 1 + bucketOf(this.residuals[this.#contextParts[part]]);
    if (kind === LAST_RESIDUAL)
      return this.#age === 1 ? table + 1 : table + 2 + bucketOf(this.#lastResiduals[part]);
    if (kind === LAST_VALUE) return table + 1 + this.#classOf(part);
    return table + 1;
  }

  /** The residual of `values[part]`. */
  split(part: number): number {
    const value = this.values[part];
    const shift = this.#shifts[part];
    const residual =
      this.#age === 0
        ? zigzagBetween(value, this.#references[part], shift)
        : residualOf(
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

  /** Sets `values[part]` from its residual. */
  join(part: number, residual: number): void {
    const shift = this.#shifts[part];
    this.residuals[part] = residual;
    this.values[part] =
      this.#age === 0
        ? valueBeside(residual, this.#references[part], shift)
        : valueFrom(
            this.#transforms[part],
            residual,
            this.#before[part],
            this.#beforeThat[part],
            shift,
            this.#signed[part],
          );
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

  /** Size class of the last value: how many bounds it has reached. */
  #classOf(part: number): number {
    const { bounds, flips } = this.plan;
    const value = (this.#before[part] ^ flips[part]) >>> 0;
    const from = part * BOUNDS;
    let reached = value >= bounds[from + 3] ? 4 : 0;
    if (value >= bounds[from + reached + 1]) reached += 2;
    if (value >= bounds[from + reached]) reached++;
    return reached;
  }
}
