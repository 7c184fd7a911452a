import { addCounts, addSteps, type OperationCounts } from '../models/counting-tally.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Setup } from './contract.ts';

/**
 * What a coder takes at one end of a device, in bytes, as an exported form with these tables would be laid out. A table's
 * integers have 1, 2 or 4 bytes each, as few as its largest possible value needs, and none where only 0 is possible.
 */
export interface EndCost {
  /** Tables; exact for the layout that the coder states. */
  readonly flashBytes: number;
  /** State, the coder's own buffers, and a bound on its stack; measured or estimated as the code is. */
  readonly ramBytes: number;
  /** Machine code: measured where a coder can be exported (cost-measured.ts), else an estimate, see {@link CodeEstimate}. */
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

/** The greater of each figure: what an end needs that meets both. */
export function mostOf(a: EndCost, b: EndCost): EndCost {
  return {
    flashBytes: Math.max(a.flashBytes, b.flashBytes),
    ramBytes: Math.max(a.ramBytes, b.ramBytes),
    codeBytes: Math.max(a.codeBytes, b.codeBytes),
  };
}

/** Both costs together: what an end needs that has both. */
export function sumOf(a: EndCost, b: EndCost): EndCost {
  return {
    flashBytes: a.flashBytes + b.flashBytes,
    ramBytes: a.ramBytes + b.ramBytes,
    codeBytes: a.codeBytes + b.codeBytes,
  };
}

/** A step around a coder: its tables, state and code beside those of the coder inside. */
export function extraCost(flashBytes: number, stateBytes: number, statements: number): EndCost {
  return endCost(flashBytes, stateBytes, { statements, nestedCalls: 0 });
}

/** `combine` at either end. */
export function atBothEnds<T>(
  a: BothEnds<T>,
  b: BothEnds<T>,
  combine: (a: T, b: T) => T,
): BothEnds<T> {
  return { encoder: combine(a.encoder, b.encoder), decoder: combine(a.decoder, b.decoder) };
}

/** Operations over several sequences together. */
export const addOperations = (a: EndOperations, b: EndOperations): EndOperations =>
  atBothEnds(a, b, addCounts);

/** Operations over the same symbols, which go through both; see {@link addSteps}. */
export const stackOperations = (a: EndOperations, b: EndOperations): EndOperations =>
  atBothEnds(a, b, addSteps);

/** Keeps the last result, so that costs and operations of the same unit are found in one pass. */
export function remembered<T>(
  make: (sequence: SymbolSequence, setup: Setup) => T,
): (sequence: SymbolSequence, setup: Setup) => T {
  let last: { sequence: SymbolSequence; setup: Setup; result: T } | undefined;
  return (sequence, setup) => {
    if (last?.sequence !== sequence || last.setup !== setup)
      last = { sequence, setup, result: make(sequence, setup) };
    return last.result;
  };
}
