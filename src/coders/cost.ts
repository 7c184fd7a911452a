import type { OperationCounts } from '../models/counting-tally.ts';

/**
 * What a coder takes at one end of a device, in bytes, as an exported form with these tables would be laid out. A table's
 * integers have 1, 2 or 4 bytes each, as few as its largest possible value needs, and none where only 0 is possible.
 */
export interface EndCost {
  /** Tables; exact for the layout that the coder states. */
  readonly flashBytes: number;
  /** State, the coder's own buffers, and a bound on its stack; the stack is an estimate. */
  readonly ramBytes: number;
  /** Machine code: an estimate, see {@link CodeEstimate}. */
  readonly codeBytes: number;
}

/** A figure for each end. */
export interface BothEnds<T> {
  readonly encoder: T;
  readonly decoder: T;
}

/** Operations counted over a sequence, for each end. */
export type EndOperations = BothEnds<OperationCounts>;

/**
 * Machine code and stack of a compact C form, estimated: its statements counted from the description of the method, at three
 * instructions a statement and 4 bytes an instruction, rounded up to 16 bytes; stack: a frame of 32 bytes a nested
 * call. Common practice, no source; a compiler's own figure replaces it where there is one.
 */
export interface CodeEstimate {
  readonly statements: number;
  readonly nestedCalls: number;
}

const BYTES_A_STATEMENT = 12;
const BYTES_A_FRAME = 32;

const codeBytesOf = ({ statements }: CodeEstimate): number =>
  Math.ceil((statements * BYTES_A_STATEMENT) / 16) * 16;

const stackBytesOf = ({ nestedCalls }: CodeEstimate): number => nestedCalls * BYTES_A_FRAME;

/** Bytes of an unsigned integer up to `greatest`, below 2^32: 0, 1, 2 or 4. */
export function integerBytes(greatest: number): number {
  if (greatest === 0) return 0;
  if (greatest < 2 ** 8) return 1;
  return greatest < 2 ** 16 ? 2 : 4;
}

/** The cost of an end with this much of each. */
export function endCost(flashBytes: number, stateBytes: number, code: CodeEstimate): EndCost {
  return {
    flashBytes,
    ramBytes: stateBytes + stackBytesOf(code),
    codeBytes: codeBytesOf(code),
  };
}
