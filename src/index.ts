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
export {
  type ChoiceFile,
  choiceFileOf,
  chooseFromRun,
  type RunChoice,
} from './compare/choice.ts';
export { type Comparison, compareCells } from './compare/compare-cells.ts';
export {
  compareRun,
  type RankedGroup,
  type Ranks,
  type RunComparison,
  ranksOf,
} from './compare/compare-run.ts';
export {
  type AdaptivePair,
  adaptivePairs,
  type Crossing,
  crossingOf,
  leastPoint,
  type TrainingReturn,
  trainingReturn,
} from './compare/curve-findings.ts';
export type { CurveLine, CurvePoint } from './compare/curve-points.ts';
export { type Curve, type CurveEntropy, curvesOf } from './compare/curves.ts';
export { type MeasuredCell, readMeasured, withMeasured } from './compare/measured.ts';
export { type PooledRun, plainRun, pooledRun } from './compare/pooled-record.ts';
export { type LoadedRun, loadRun } from './compare/read-messages.ts';
export { cellNamed, type Why, whyOf } from './compare/why.ts';
export { type Plan, parsePlan, readPlan } from './corpus/plan.ts';
export {
  type EntropyByOrder,
  type EntropyOptions,
  entropyByOrder,
} from './entropy/entropy-by-order.ts';
export { type Floor, floorOf } from './entropy/floor.ts';
export * from './errors/errors.ts';
export { type Export, type ExportFormat, exportFiles } from './export/export-files.ts';
export { type ExportSubject, exportSubject } from './export/export-subject.ts';
export { proveExport } from './export/prove-export.ts';
export { type Allow, allowOf, type Growth, parseAllow } from './gate/allow.ts';
export { type Baseline, baselineOf } from './gate/baseline.ts';
export { baselineText, parseBaseline, readBaseline } from './gate/baseline-file.ts';
export { type Creep, creepOf } from './gate/creep.ts';
export { type CellGate, type Gate, gateJson, gateRun } from './gate/gate.ts';
export type { GateCheck, GateVerdict } from './gate/gate-check.ts';
export { type AdoptedRun, adoptedRunOf, appendHistory, readHistory } from './gate/history.ts';
export { type Step, stepsOf } from './gate/steps.ts';
export { cacheFolder } from './harness/cache-folder.ts';
export { CacheStore } from './harness/cache-store.ts';
export { type CalibrationPlan, calibrationSources, runCalibration } from './harness/calibrate.ts';
export { packContainer, unpackContainer } from './harness/container.ts';
export { type EntropyReport, entropyReport } from './harness/entropy-report.ts';
export { estimateSeconds } from './harness/estimate.ts';
export { loadCorpusData } from './harness/load-corpus-data.ts';
export {
  type MemoryCorpusOptions,
  type MessageData,
  memoryCorpus,
  sequenceOf,
} from './harness/memory-corpus.ts';
export { type OwnCodec, type OwnRate, rateOfOwn } from './harness/own-codec.ts';
export { requestOf } from './harness/plan-request.ts';
export { type Rate, type RateOptions, rateOf } from './harness/rate-of.ts';
export { type RunRequest, type RunResult, runAll } from './harness/run-all.ts';
export { readRunRecord, writeRunFolder } from './harness/run-folder.ts';
export { type RunPlanOptions, runPlan } from './harness/run-plan.ts';
export { type RunRecord, runRecordJsonSchema } from './harness/run-record.ts';
export { type MannerResult, type RunManner, runWith } from './harness/run-with.ts';
export { calibrateScreen } from './report/calibrate-screen.ts';
export { chooseScreen } from './report/choose-screen.ts';
export { entropyScreen } from './report/entropy-screen.ts';
export { gateJunit } from './report/gate-junit.ts';
export { gateMarkdown } from './report/gate-markdown.ts';
export { gateScreen } from './report/gate-screen.ts';
export { runScreen } from './report/run-screen.ts';
export { tryScreen } from './report/try-screen.ts';
export { whyScreen } from './report/why-screen.ts';
export type { SpeedComparison, SpeedVerdict } from './statistics/speed-verdict.ts';
export {
  oneMessage,
  type SymbolChunk,
  type SymbolSequence,
  sliceMessages,
} from './symbols/sequence.ts';
