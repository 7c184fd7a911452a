import type { EntropyByOrder, OrderEntropy } from '../entropy/entropy-by-order.ts';
import type { MatchLengthEntropy } from '../entropy/match-lengths.ts';
import type { EstimatorLine, IntervalLine } from './calibrate-record.ts';
import { askedOrder, type CalibrationSource } from './calibrate-source.ts';
import { judgeIntervals } from './calibrate-verdicts.ts';

/** Mean and standard deviation of figures that come one by one. Source: Welford 1962. */
class RunningMean {
  count = 0;
  mean = 0;
  #squares = 0;

  add(value: number): void {
    this.count++;
    const before = value - this.mean;
    this.mean += before / this.count;
    this.#squares += before * (value - this.mean);
  }

  /** 0 for fewer than two figures. */
  get spread(): number {
    return this.count < 2 ? 0 : Math.sqrt(this.#squares / (this.count - 1));
  }
}

/** What has been seen of one order. */
class OrderTally {
  readonly truth: number;
  readonly #error = new RunningMean();
  readonly #halfWidth = new RunningMean();
  readonly #reasons = new Map<string, number>();
  estimable = 0;
  trusted = 0;
  tooLow = 0;
  tooHigh = 0;
  unit = '';

  constructor(truth: number) {
    this.truth = truth;
  }

  add(order: OrderEntropy): void {
    this.#error.add(order.corrected - this.truth);
    this.#halfWidth.add((order.high - order.low) / 2);
    this.unit = order.intervalUnit;
    if (order.estimable) this.estimable++;
    if (!order.intervalTrusted) {
      this.#reasons.set(order.intervalReason, (this.#reasons.get(order.intervalReason) ?? 0) + 1);
      return;
    }
    this.trusted++;
    // The truth is a sum of rounded terms, and so may miss a cut end by a hair.
    if (order.high < this.truth - 1e-9) this.tooLow++;
    else if (order.low > this.truth + 1e-9) this.tooHigh++;
  }

  line(source: CalibrationSource, symbolCount: number, k: number): IntervalLine {
    const counted = {
      repetitions: this.#error.count,
      estimable: this.estimable,
      trusted: this.trusted,
      held: this.trusted - this.tooLow - this.tooHigh,
      too_low: this.tooLow,
      too_high: this.tooHigh,
      bias: this.#error.mean,
      spread: this.#error.spread,
      half_width: this.#halfWidth.mean,
      against_order: againstOrder(source.order, k),
    };
    const [reason = ''] = [...this.#reasons].sort((a, b) => b[1] - a[1])[0] ?? [];
    return {
      source: source.name,
      symbol_count: symbolCount,
      k,
      truth: this.truth,
      ...counted,
      interval_unit: this.unit,
      ...judgeIntervals({
        ...counted,
        reason,
        atEdge: this.truth === 0 || source.uniform,
      }),
    };
  }
}

function againstOrder(order: number | undefined, k: number): IntervalLine['against_order'] {
  if (order === undefined) return 'none';
  return k < order ? 'below' : k === order ? 'own' : 'above';
}

interface EstimatorTally {
  readonly name: string;
  readonly k?: number;
  readonly error: RunningMean;
  held?: number;
}

/** Gathers the repetitions of one source at one length. */
export class SourceTally {
  readonly #source: CalibrationSource;
  readonly #symbolCount: number;
  readonly #orders: OrderTally[] = [];
  /** By estimator and order; insertion keeps the order of lines. */
  readonly #estimators = new Map<string, EstimatorTally>();

  constructor(source: CalibrationSource, symbolCount: number) {
    this.#source = source;
    this.#symbolCount = symbolCount;
  }

  add(entropy: EntropyByOrder, matches?: MatchLengthEntropy): void {
    const asked = askedOrder(this.#source);
    for (const order of entropy.orders) {
      const { k } = order;
      const truth = this.#source.conditionalBits(k);
      if (truth === undefined) continue;
      this.#orders[k] ??= new OrderTally(truth);
      this.#orders[k].add(order);
      if (order.estimates === undefined || k !== asked) continue;
      const { grassberger, chaoShen, nsb } = order.estimates;
      this.#note('plug-in', order.plugIn - truth, k);
      this.#note('Miller–Madow', order.corrected - truth, k);
      this.#note('Grassberger', grassberger - truth, k);
      this.#note('Chao–Shen', chaoShen - truth, k);
      if (nsb !== undefined) this.#note('Nemenman–Shafee–Bialek', nsb - truth, k);
    }
    const { rate } = this.#source;
    if (matches === undefined || rate === undefined) return;
    const truth = (rate.low + rate.high) / 2;
    this.#note('match lengths, as published', matches.publishedBitsPerSymbol - truth);
    if (!matches.valid) return;
    const entry = this.#note('match lengths', matches.bitsPerSymbol - truth);
    entry.held ??= 0;
    if (matches.low <= rate.high + 1e-9 && matches.high >= rate.low - 1e-9) entry.held++;
  }

  #note(name: string, error: number, k?: number): EstimatorTally {
    const key = `${name} ${k}`;
    let entry = this.#estimators.get(key);
    if (entry === undefined) {
      entry = { name, error: new RunningMean(), ...(k === undefined ? {} : { k }) };
      this.#estimators.set(key, entry);
    }
    entry.error.add(error);
    return entry;
  }

  /** One line an order, lowest first. */
  intervalLines(): IntervalLine[] {
    return this.#orders.map((tally, k) => tally.line(this.#source, this.#symbolCount, k));
  }

  estimatorLines(): EstimatorLine[] {
    return [...this.#estimators.values()].map(({ name, k, error, held }) => ({
      source: this.#source.name,
      symbol_count: this.#symbolCount,
      ...(k === undefined ? {} : { k }),
      estimator: name,
      repetitions: error.count,
      bias: error.mean,
      spread: error.spread,
      ...(held === undefined ? {} : { held }),
    }));
  }
}
