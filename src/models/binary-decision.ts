/**
 * What passes between a model of binary decisions and a binary stage: how likely a 1 is, in 65536ths, 1 … 65 535. Never 0 or
 * 65536: a stage must be able to code either bit.
 */

/** All probabilities are parts of this. */
export const DECISION_TOTAL = 2 ** 16;

/** The encoder's side. */
export interface DecisionSink {
  /** @param ones  probability of a 1, 1 … 65 535 */
  put(bit: number, ones: number): void;
}

/** The decoder's side. */
export interface DecisionSource {
  /** The next bit, given how likely a 1 is. Throws CorruptStreamError when the bytes hold none. */
  take(ones: number): number;
}
