import type { OperationTally } from '../models/counting-tally.ts';

/** Zeros that the encoder writes at once, and the decoder sees at once. */
const RUN_BITS = 32;
const LOOK_BITS = 25;

/**
 * Adds what a word with `zeros` zeros, a one and `width` more bits takes.
 *
 * Encoder: whether it goes at once; if not, the test of the loop over 32 zeros each. Decoder: for every 25 zeros, whether
 * they are too many and whether the run ends.
 */
export function countUnaryWord(
  zeros: number,
  width: number,
  encoder: OperationTally,
  decoder: OperationTally,
): void {
  encoder.branches += 1;
  if (zeros + 1 + width > RUN_BITS) encoder.branches += Math.ceil(zeros / RUN_BITS) + 1;
  decoder.branches += 2 * (Math.floor(zeros / LOOK_BITS) + 1);
}
