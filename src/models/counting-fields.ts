import type { OperationTally } from './counting-tally.ts';
import { LARGEST_TOTAL, STEP } from './field-counts.ts';
import { EARLIER_FIELD, type FieldPlan, LAST_RESIDUAL, NO_CONTEXT } from './field-plan.ts';
import type { FieldPredictor } from './field-predictor.ts';
import { codePart, PIECE_BITS } from './field-records.ts';
import { LINEAR, RAW, TRANSFORM_CODES } from './field-residual.ts';
import type { TokenWriter } from './field-tables.ts';
import { EXTRA_BITS } from './field-token.ts';
import type { IntervalSink } from './interval.ts';

/**
 * Codes records by the model's own steps, and counts what these and the decoder's read and decide: elements of the plan, of the
 * records before and of the tables; the record at hand is the message's own memory. A record is booked on its last byte at the
 * encoder, on its first at the decoder.
 *
 * - Table of a part: its first, whether there is a record before; the kind of context and one test after another for it. The own last
 *   residual: how many records there are, it, whether it is small. Otherwise the part asked: its residual and whether that is small,
 *   or its value, what turns it in order, and three bounds.
 * - Expectation: width and whether there is a record before. Without: what to begin beside, if anything, and the reference. With:
 *   the transform, tested in turn, the two values before and the sign; under `linear` the places of inputs and weights, for each value its
 *   width and sign, the product of each weight but the constant's, and one for its class.
 * - Token: whether it stands for itself, its extra bits, and a test for each piece of them; the decoder also reads its least value.
 * - Static tables: the first slot and two lower ends; the decoder walks from the first token on, a lower end and a test each. Adaptive
 *   ones: the first slot, and the encoder adds up, the decoder walks, count by count; then count and total, and whether the total
 *   is too large: if so every count of the table is read twice.
 * - The record's end: for each part whether it was the first, the value before, the residual; one test more.
 */
export class CountingFields {
  readonly #plan: FieldPlan;
  readonly #predictor: FieldPredictor;
  readonly #tables: TokenWriter;
  readonly #isAdaptive: boolean;
  readonly #encoder: OperationTally;
  readonly #decoder: OperationTally;
  readonly #watch: WatchedTables;
  /** Records since the contexts began, at most 2. */
  #age = 0;

  constructor(
    predictor: FieldPredictor,
    tables: TokenWriter,
    isAdaptive: boolean,
    encoder: OperationTally,
    decoder: OperationTally,
  ) {
    this.#plan = predictor.plan;
    this.#predictor = predictor;
    this.#tables = tables;
    this.#isAdaptive = isAdaptive;
    this.#encoder = encoder;
    this.#decoder = decoder;
    this.#watch = new WatchedTables(tables);
  }

  get recordBytes(): number {
    return this.#plan.layout.bytes;
  }

  /** Begins a message. */
  reset(): void {
    this.#predictor.start();
    this.#tables.reset();
    this.#age = 0;
  }

  /** Codes the record at `bytes[at …]` and closes its bytes. */
  code(bytes: Uint8Array, at: number, sink: IntervalSink): void {
    const { layout, partCount } = this.#plan;
    const predictor = this.#predictor;
    layout.takeApart(bytes, at, predictor.values);
    for (let part = 0; part < partCount; part++) {
      this.#countContext(part);
      codePart(predictor, this.#watch, part, sink);
      this.#countExpectation(part);
      this.#countToken();
    }
    predictor.advance();
    this.#count(0, partCount * (this.#age === 0 ? 1 : 2), partCount + 1);
    if (this.#age < 2) this.#age++;
    this.#decoder.close();
    for (let i = 1; i < layout.bytes; i++) {
      this.#encoder.close();
      this.#decoder.close();
    }
    this.#encoder.close();
  }

  #count(multiplies: number, tableReads: number, branches: number): void {
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    encoder.multiplies += multiplies;
    decoder.multiplies += multiplies;
    encoder.tableReads += tableReads;
    decoder.tableReads += tableReads;
    encoder.branches += branches;
    decoder.branches += branches;
  }

  #countContext(part: number): void {
    const kind = this.#plan.contexts[part];
    this.#count(0, 1, 1);
    if (this.#age === 0) return;
    this.#count(0, 1, 1);
    if (kind === NO_CONTEXT) return;
    this.#count(0, 0, 1);
    if (kind === LAST_RESIDUAL) {
      this.#count(0, 0, 1);
      if (this.#age > 1) this.#count(0, 1, 1);
      return;
    }
    this.#count(0, 1, 1);
    if (kind === EARLIER_FIELD) this.#count(0, 1, 1);
    // Of which record; value, order, bounds. A value of this record is no table's.
    else this.#count(0, (this.#asksThisRecord(part) ? 0 : 1) + 1 + 3, 1 + 3);
  }

  #asksThisRecord(part: number): boolean {
    return this.#plan.choices[part].context.kind === 'at';
  }

  #countExpectation(part: number): void {
    const { firstParts, transforms, inputs, inputStart } = this.#plan;
    this.#count(0, 1, 1);
    if (this.#age === 0) {
      this.#count(0, 2, 1);
      // The number that the other value stands for.
      if (firstParts[part] >= 0) this.#count(0, 2, 1);
      return;
    }
    const transform = transforms[part];
    this.#count(0, 1, 1);
    if (transform !== LINEAR) {
      const tests =
        transform === TRANSFORM_CODES.delta ? 1 : transform === TRANSFORM_CODES.xor ? 2 : 3;
      this.#count(0, 4, tests + (transform === RAW ? 1 : 0));
      return;
    }
    // Three places; the constant's weight; the last two values and the weight of their difference; the loop's end.
    this.#count(2, 3 + 1 + 3 + 3 + 1, 2 + 1);
    for (let i = inputStart[part]; i < inputStart[part + 1]; i++) {
      // The input; its value before; its other value, of this record or before that; two weights.
      this.#count(2, 1 + 3 + (inputs[i] < part ? 2 : 3) + 2, 1 + 1 + 1 + 1);
    }
  }

  #countToken(): void {
    const { slotStart } = this.#plan;
    const { table, token, total } = this.#watch;
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    const pieces = Math.ceil(EXTRA_BITS[token] / PIECE_BITS);
    encoder.branches += 1 + pieces + 1;
    encoder.tableReads += 1;
    decoder.branches += pieces + 1;
    decoder.tableReads += 2;
    if (!this.#isAdaptive) {
      encoder.tableReads += 3;
      decoder.tableReads += 1 + (token + 1) + 2;
      decoder.branches += token + 1;
      return;
    }
    encoder.tableReads += 1 + token + 2;
    encoder.branches += token + 1;
    decoder.tableReads += 2 + (token + 1) + token + 1;
    decoder.branches += token + 1;
    this.#count(0, 3, 1);
    if (total + STEP <= LARGEST_TOTAL) return;
    const slots = slotStart[table + 1] - slotStart[table];
    this.#count(0, 2 + 2 * slots, slots + 1);
  }
}

/** Remembers the total of an interval on its way. */
class WatchedTotal implements IntervalSink {
  total = 0;
  sink: IntervalSink = { put() {} };

  put(low: number, frequency: number, total: number): void {
    this.total = total;
    this.sink.put(low, frequency, total);
  }
}

/** Remembers what is asked of tables on its way. */
class WatchedTables implements TokenWriter {
  table = 0;
  token = 0;
  readonly #tables: TokenWriter;
  readonly #way = new WatchedTotal();

  constructor(tables: TokenWriter) {
    this.#tables = tables;
  }

  /** Of the table before it was counted in. */
  get total(): number {
    return this.#way.total;
  }

  reset(): void {
    this.#tables.reset();
  }

  put(table: number, token: number, sink: IntervalSink): void {
    this.table = table;
    this.token = token;
    this.#way.sink = sink;
    this.#tables.put(table, token, this.#way);
  }
}
