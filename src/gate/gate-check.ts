/**
 * `held`: as good, or worse by no more than allowed. `lost`: it held and does not any more. `open`: compared, and these samples
 * do not decide.
 */
export type GateVerdict = 'held' | 'lost' | 'better' | 'open' | 'not compared';

/** One figure of a cell against the baseline. */
export interface GateCheck {
  /** `verified`, `carried_bits`, `files`, `encode.speed`, `decoder.flash_bytes` … */
  readonly figure: string;
  readonly verdict: GateVerdict;
  readonly was?: number | boolean;
  readonly now?: number | boolean;
  /** Why it was not compared, or what a reader must know of the verdict. */
  readonly reason?: string;
}
