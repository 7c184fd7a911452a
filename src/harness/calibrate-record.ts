import { z } from 'zod';

/** How a promise fared: kept, broken (and how), or withdrawn before the truth was looked at. */
export const calibrationVerdicts = ['holds', 'misses', 'flagged beforehand'] as const;
export type CalibrationVerdict = (typeof calibrationVerdicts)[number];

const verdict = { verdict: z.enum(calibrationVerdicts), verdict_text: z.string() };

/** One source at one length and order: what the interval of the corrected entropy promised, and what was true. */
const intervalLine = z.strictObject({
  source: z.string(),
  symbol_count: z.number(),
  k: z.number(),
  /** Where k stands beside the source's own order. */
  against_order: z.enum(['below', 'own', 'above', 'none']),
  /** Exact entropy given k predecessors: from the source's own order on, its rate. */
  truth: z.number(),
  repetitions: z.number(),
  estimable: z.number(),
  trusted: z.number(),
  /** Of the trusted intervals. */
  held: z.number(),
  too_low: z.number(),
  too_high: z.number(),
  bias: z.number(),
  spread: z.number(),
  half_width: z.number(),
  interval_unit: z.string(),
  ...verdict,
});

/** How far an estimator is off on average, and how much it scatters. */
const estimatorLine = z.strictObject({
  source: z.string(),
  symbol_count: z.number(),
  /** Absent for estimators of the rate that fix no order. */
  k: z.number().optional(),
  estimator: z.string(),
  repetitions: z.number(),
  bias: z.number(),
  spread: z.number(),
  /** Of the estimator's own 95 % intervals, those that hold the truth; absent where it has none. Nothing is promised of it. */
  held: z.number().optional(),
});

/** What a verified coder needs on one stretch, beside what the stretch cannot do without. Bits per symbol. */
const coderLine = z.strictObject({
  source: z.string(),
  symbol_count: z.number(),
  candidate: z.string(),
  tables: z.string(),
  rate: z.number(),
  /** −log2 of the probability of this very stretch. */
  own_content: z.number(),
  ideal: z.number().optional(),
  /** Absent where nothing was coded, or the decode gave back something else. */
  carried: z.number().optional(),
  ...verdict,
});

/** Whether a change of the source is noticed, or one is reported where there is none. */
const changeLine = z.strictObject({
  source: z.string(),
  symbol_count: z.number(),
  changes: z.boolean(),
  repetitions: z.number(),
  found: z.number(),
  ...verdict,
});

const sourceLine = z.strictObject({
  name: z.string(),
  description: z.string(),
  alphabet_size: z.number(),
  /** Absent where no order is enough, or the source changes. */
  order: z.number().optional(),
  rate: z.strictObject({ low: z.number(), high: z.number() }).optional(),
});

/** What `calibrate` leaves. Rates are in bits per symbol. */
export const calibrationRecordSchema = z.strictObject({
  calibration: z.literal(1),
  tool: z.string(),
  seed: z.string(),
  sources: z.array(sourceLine),
  intervals: z.array(intervalLine),
  estimators: z.array(estimatorLine),
  coders: z.array(coderLine),
  changes: z.array(changeLine),
  /** Lines whose promise was broken. */
  broken: z.number(),
  partial: z.boolean(),
});

export type CalibrationRecord = z.infer<typeof calibrationRecordSchema>;
export type IntervalLine = z.infer<typeof intervalLine>;
export type EstimatorLine = z.infer<typeof estimatorLine>;
export type CoderLine = z.infer<typeof coderLine>;
export type ChangeLine = z.infer<typeof changeLine>;
