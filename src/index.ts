/** The library's face: everything the command line does, without the command line. */
export {
  ACCOUNT_LINES,
  type AccountLine,
  type BitAccount,
  bitAccount,
} from './account/bit-account.ts';
export { type Candidate, parseCandidate, parseCandidates } from './coders/candidate.ts';
export type {
  Coded,
  CodedInput,
  Coder,
  CoderEntry,
  Declaration,
  Decoded,
  DecodeLimits,
  Decoder,
  Encoder,
  Lengths,
  Price,
  Reset,
  Setup,
  TablePolicy,
  Tables,
  Trainer,
} from './coders/contract.ts';
export { coderEntries } from './coders/registry.ts';
export { compareCellSpeeds, type TimedCell } from './compare/cell-speeds.ts';
export { type Comparison, compareCells } from './compare/compare-cells.ts';
export {
  compareRun,
  type RankedGroup,
  type Ranks,
  type RunComparison,
  ranksOf,
} from './compare/compare-run.ts';
export { type LoadedRun, loadRun } from './compare/read-messages.ts';
export { type Plan, parsePlan, readPlan } from './corpus/plan.ts';
export {
  type EntropyByOrder,
  type EntropyOptions,
  entropyByOrder,
} from './entropy/entropy-by-order.ts';
export { type Floor, floorOf } from './entropy/floor.ts';
export * from './errors/errors.ts';
export { requestOf } from './harness/plan-request.ts';
export { type RunRequest, type RunResult, runAll } from './harness/run-all.ts';
export { readRunRecord, writeRunFolder } from './harness/run-folder.ts';
export { type RunRecord, runRecordJsonSchema } from './harness/run-record.ts';
export {
  oneMessage,
  type SymbolChunk,
  type SymbolSequence,
  sliceMessages,
} from './symbols/sequence.ts';
