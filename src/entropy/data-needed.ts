import { InputError } from '../errors/errors.ts';

/**
 * Standard errors that a difference must span to be seen four times in five by a 95 % interval: 1.96 for the interval,
 * 0.84 for the power.
 * Source: W. G. Cochran, "Sampling Techniques", 3rd ed. 1977, §4.6 (sample size from a normal law, from memory).
 */
const STANDARD_ERRORS = 1.959964 + 0.841621;

/** A paired difference as it was measured. */
export interface MeasuredError {
  /** Symbols it was measured on; above 0. */
  readonly symbols: number;
  /** Standard error of the difference per symbol, bits. */
  readonly standardError: number;
}

/** The least difference, in bits per symbol, that data of this size tell from none four times in five. */
export function resolvedDifference({ standardError }: MeasuredError): number {
  return STANDARD_ERRORS * standardError;
}

/**
 * Symbols needed to tell a difference from none four times in five, if more data of the same kind are taken: the standard error
 * falls with the square root of the symbols.
 * @param difference  bits per symbol, above 0
 * @throws InputError for another difference
 */
export function symbolsToResolve(error: MeasuredError, difference: number): number {
  if (!(difference > 0) || !Number.isFinite(difference)) {
    throw new InputError('a difference to resolve must be above 0 bits/symbol', {
      got: String(difference),
    });
  }
  return Math.ceil(error.symbols * (resolvedDifference(error) / difference) ** 2);
}
