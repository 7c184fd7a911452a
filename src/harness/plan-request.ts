import { type Candidate, parseCandidates } from '../coders/candidate.ts';
import type { Plan } from '../corpus/plan.ts';
import { BitassayError, InputError } from '../errors/errors.ts';
import { describeSplit, loadCorpusData } from './load-corpus-data.ts';
import type { RunRequest } from './run-all.ts';

/** Longest that one direction of a cell is timed for, once it has three samples. */
const TIMING_SECONDS = 0.25;

/**
 * The candidates of a plan, ranges opened.
 * @throws InputError that names the line of a candidate that cannot be read
 */
function candidatesOf(plan: Plan): Candidate[] {
  return plan.candidates.flatMap((text, i) => {
    try {
      return parseCandidates(text);
    } catch (error) {
      if (!(error instanceof BitassayError)) throw error;
      throw new InputError(
        error.message,
        { ...error.where, file: plan.file, line: plan.candidateLines[i] },
        error,
      );
    }
  });
}

/** Whether any cell of the plan is trained, so that all cells are coded on the test part. */
function trains(plan: Plan, candidates: readonly Candidate[]): boolean {
  return candidates.some(({ declaration }) =>
    declaration.policies.some(
      (policy) => (policy === 'shipped' || policy === 'primed') && plan.tables.includes(policy),
    ),
  );
}

/** Reads the plan's corpora and makes the request that a run takes. */
export async function requestOf(plan: Plan): Promise<RunRequest> {
  const candidates = candidatesOf(plan);
  const rule = trains(plan, candidates) ? plan.split : undefined;
  const corpora = [];
  for (const spec of plan.corpora) corpora.push(await loadCorpusData(spec, plan.folder, rule));
  return {
    title: plan.title ?? plan.file,
    corpora,
    candidates,
    policies: plan.tables,
    resets: plan.reset,
    align: plan.align,
    ...(plan.lossRate === undefined ? {} : { lossRate: plan.lossRate }),
    ...(plan.billStepBytes === undefined ? {} : { billStepBytes: plan.billStepBytes }),
    ...(plan.device === undefined ? {} : { device: plan.device }),
    split: describeSplit(rule),
    ageing: rule !== undefined && rule.order === 'in_time',
    timing: { repeats: plan.timing.repeats, seconds: TIMING_SECONDS },
  };
}
