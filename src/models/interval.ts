/**
 * What passes between a model and a coding stage: intervals [low, low + frequency) of total, all integers.
 *
 * Promises of every model ({@link checkInterval} holds them to it in tests; kernels trust them):
 * 1. 0 ≤ low, 1 ≤ frequency, low + frequency ≤ total;
 * 2. total ≤ {@link LARGEST_TOTAL} where a stage codes it (a meter takes any total below 2^53);
 * 3. an interval that is certain (frequency = total) is not handed over at all: it carries nothing, and a stage would lose
 *    a trifle on it.
 *
 * A symbol may take several intervals (escapes) or none (certain). The interfaces lie with the models, the lower layer.
 */
import { PromiseError } from '../errors/errors.ts';

/** Largest total that a stage divides its range by, at either precision. */
export const LARGEST_TOTAL = 2 ** 22;

/**
 * The encoder's side: takes intervals one by one.
 *
 * Models call it from their inner loops. There are few classes of it in a process (a range encoder, a meter), and they
 * must stay few: a call site that has seen more than four is a third slower.
 */
export interface IntervalSink {
  put(low: number, frequency: number, total: number): void;
}

/** The decoder's side. Each symbol step is `target`, then `take` with the interval that holds the target. */
export interface IntervalSource {
  /** An integer in 0 … total − 1 within the coded interval. Throws CorruptStreamError when the bytes hold none. */
  target(total: number): number;
  /** Narrows to the interval that holds the last target; same total as asked for. */
  take(low: number, frequency: number): void;
}

/** Throws PromiseError unless the interval keeps promises 1 and 2. */
export function checkInterval(low: number, frequency: number, total: number): void {
  const whole = Number.isInteger(low) && Number.isInteger(frequency) && Number.isInteger(total);
  if (whole && low >= 0 && frequency >= 1 && low + frequency <= total && total <= LARGEST_TOTAL) {
    return;
  }
  throw new PromiseError('a model gave an interval that no stage can code', {
    expected: `0 ≤ low, 1 ≤ frequency, low + frequency ≤ total ≤ ${LARGEST_TOTAL}`,
    got: `low ${low}, frequency ${frequency}, total ${total}`,
  });
}
