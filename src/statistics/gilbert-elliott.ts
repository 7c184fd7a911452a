import type { SeededGenerator } from './generator.ts';

/**
 * Losses of messages by a channel that is good or bad in turn: before each message it changes with a probability that its
 * state gives, and the message is lost with a probability that its state gives. All are from 0 to 1; `goodToBad` and
 * `badToGood` are not both 0. Equal losses in both states are independent losses.
 *
 * Source: E. N. Gilbert, "Capacity of a burst-noise channel", 1960 (no loss in the good state); E. O. Elliott, "Estimates of
 * error rates for codes on burst-noise channels", 1963.
 */
export interface LossLaw {
  readonly goodToBad: number;
  readonly badToGood: number;
  readonly lostInBad: number;
  readonly lostInGood: number;
}

/** Each message lost with the same probability, whatever became of the others. */
export function independentLosses(rate: number): LossLaw {
  return { goodToBad: 0, badToGood: 1, lostInBad: rate, lostInGood: rate };
}

/** Share of messages that meet the bad state, in the long run. */
export function badShareOf({ goodToBad, badToGood }: LossLaw): number {
  return goodToBad / (goodToBad + badToGood);
}

/** Share of messages lost, in the long run. */
export function lossRateOf(law: LossLaw): number {
  const bad = badShareOf(law);
  return bad * law.lostInBad + (1 - bad) * law.lostInGood;
}

/**
 * Standard deviation of the share lost among `count` messages in a row that begin in the long run. Losses h messages apart
 * have the covariance b(1 − b)(lost in bad − lost in good)² rʰ, b the share of the bad state, r = 1 − goodToBad − badToGood.
 */
export function lossRateDeviation(law: LossLaw, count: number): number {
  const bad = badShareOf(law);
  const rate = lossRateOf(law);
  const r = 1 - law.goodToBad - law.badToGood;
  const between = bad * (1 - bad) * (law.lostInBad - law.lostInGood) ** 2;
  // Σ over h = 1 … n − 1 of (1 − h/n) rʰ; r = 1 is ruled out.
  const sum = r / (1 - r) - (r * (1 - r ** count)) / (count * (1 - r) ** 2);
  return Math.sqrt(Math.max(0, rate * (1 - rate) + 2 * between * sum) / count);
}

/**
 * Entry i is the probability that i messages in a row all arrive, whenever they begin.
 * @param most  the largest i
 */
export function allArrive(law: LossLaw, most: number): Float64Array {
  const chances = new Float64Array(most + 1);
  let bad = badShareOf(law);
  let good = 1 - bad;
  chances[0] = 1;
  for (let i = 1; i <= most; i++) {
    const goodArrived = good * (1 - law.lostInGood);
    const badArrived = bad * (1 - law.lostInBad);
    chances[i] = goodArrived + badArrived;
    good = goodArrived * (1 - law.goodToBad) + badArrived * law.badToGood;
    bad = goodArrived * law.goodToBad + badArrived * (1 - law.badToGood);
  }
  return chances;
}

/** Chances that a message is the first lost after one that arrived, with the channel good and bad. */
function firstLost(law: LossLaw): { good: number; bad: number } {
  const bad = badShareOf(law);
  const goodArrived = (1 - bad) * (1 - law.lostInGood);
  const badArrived = bad * (1 - law.lostInBad);
  const goodNext = goodArrived * (1 - law.goodToBad) + badArrived * law.badToGood;
  const badNext = goodArrived * law.goodToBad + badArrived * (1 - law.badToGood);
  return { good: goodNext * law.lostInGood, bad: badNext * law.lostInBad };
}

/** Mean number of messages lost in a row. The loss rate is above 0 and below 1. */
export function meanLossRun(law: LossLaw): number {
  const { good, bad } = firstLost(law);
  return lossRateOf(law) / (good + bad);
}

/** The channel, message by message. */
export class LossProcess {
  readonly #law: LossLaw;
  readonly #generator: SeededGenerator;
  #bad: boolean;

  /** Begins in the long run. */
  constructor(law: LossLaw, generator: SeededGenerator) {
    this.#law = law;
    this.#generator = generator;
    this.#bad = generator.real() < badShareOf(law);
  }

  /** Whether the next message is lost. */
  isLost(): boolean {
    const { lostInBad, lostInGood } = this.#law;
    const lost = this.#generator.real() < (this.#bad ? lostInBad : lostInGood);
    this.#step();
    return lost;
  }

  /**
   * Length of one of the runs of messages that are lost in a row, each as likely as it is frequent; the loss rate is above 0
   * and below 1.
   * @param most  longer runs are cut to this
   */
  drawRun(most: number): number {
    const { good, bad } = firstLost(this.#law);
    this.#bad = this.#generator.real() * (good + bad) < bad;
    this.#step();
    let length = 1;
    while (length < most && this.isLost()) length++;
    return length;
  }

  #step(): void {
    const { goodToBad, badToGood } = this.#law;
    const change = this.#generator.real() < (this.#bad ? badToGood : goodToBad);
    if (change) this.#bad = !this.#bad;
  }
}
