import { type Candidate, parseCandidates } from '../coders/candidate.ts';
import type { SplitRule } from '../corpus/decide-split.ts';
import type { Plan } from '../corpus/plan.ts';
import { BitassayError, InputError } from '../errors/errors.ts';
import { budgetOf } from './budget.ts';
import type { CorpusData } from './corpus-data.ts';
import { describeSplit, loadCorpusData } from './load-corpus-data.ts';
import { loadVariedData } from './load-varied-data.ts';
import type { RunRequest } from './run-all.ts';
import { checkPacer } from './time-pacer.ts';

/**
 * The candidates of a plan, ranges opened.
 * @throws InputError that names the line of a candidate that cannot be read
 */
export function candidatesOf(plan: Plan): Candidate[] {
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

/** How the plan's data are parted; undefined where nothing trains. */
export function splitRuleOf(plan: Plan, candidates: readonly Candidate[]): SplitRule | undefined {
  if (trains(plan, candidates)) return plan.split;
  const { vary, split } = plan.written;
  const needless = [
    ...(vary?.train_share === undefined ? [] : [['vary', 'train_share']]),
    ...(split?.folds === undefined ? [] : [['split', 'folds']]),
  ];
  for (const path of needless) {
    throw new InputError(`${path.join('.')} changes nothing where no candidate is trained`, {
      file: plan.file,
      line: plan.lineOf(...path),
      key: path.join('.'),
      expected: 'a candidate that declares shipped or primed tables, and those among tables',
      got: `tables: ${plan.tables.join(', ')}`,
    });
  }
  return undefined;
}

/** Runs `read`; what it refuses for a key of the plan names the line of that key. */
async function withLine<T>(plan: Plan, read: () => Promise<T>): Promise<T> {
  try {
    return await read();
  } catch (error) {
    const key = error instanceof InputError ? error.where.key : undefined;
    if (!(error instanceof InputError) || !/^(vary|split|timing)\./.test(key ?? '')) throw error;
    const where = { ...error.where, file: plan.file, line: plan.lineOf(...key!.split('.')) };
    throw new InputError(error.message, where, error);
  }
}

/**
 * The plan's corpora, each once, without what it varies: with folds all their data, else the part that cells code.
 * @throws what intake and split throw
 */
export async function corporaOfPlan(plan: Plan): Promise<CorpusData[]> {
  const rule = splitRuleOf(plan, candidatesOf(plan));
  const whole = rule?.folds === undefined ? rule : undefined;
  const corpora = [];
  for (const spec of plan.corpora) corpora.push(await loadCorpusData(spec, plan.folder, whole));
  return corpora;
}

/** Most data that one corpus may be varied into. */
const MOST_DATA = 1000;

/** Refuses, before any file is read, a plan that varies its data more than anybody means. */
function guardData({ vary, split, file, lineOf }: Plan): void {
  const sizes = 1 + (vary.messageSymbols?.length ?? 0);
  const shares = 1 + (vary.trainShares?.length ?? 0);
  const count = sizes * shares * (split.folds ?? 1);
  if (count <= MOST_DATA) return;
  const key = sizes * shares === 1 ? 'split' : 'vary';
  throw new InputError(`the plan varies the data of each corpus ${count} times`, {
    file,
    line: lineOf(key),
    key,
    expected: `at most ${MOST_DATA} combinations of message sizes, shares and folds`,
    got: `${sizes} × ${shares} × ${split.folds ?? 1}, the plan's own among them`,
    advice: 'Vary one thing at a time, each in a plan of its own.',
  });
}

/** Reads the plan's corpora and makes the request that a run takes. */
export async function requestOf(plan: Plan): Promise<RunRequest> {
  const candidates = candidatesOf(plan);
  const rule = splitRuleOf(plan, candidates);
  guardData(plan);
  const corpora: CorpusData[] = [];
  for (const spec of plan.corpora) {
    corpora.push(
      ...(await withLine(plan, () => loadVariedData(spec, plan.folder, rule, plan.vary))),
    );
  }
  if (plan.timing.repeats > 0)
    await withLine(plan, async () => checkPacer(plan.timing.pacer, corpora));
  return {
    title: plan.title ?? plan.file,
    corpora,
    candidates,
    policies: plan.tables,
    resets: plan.reset,
    align: plan.align,
    ...(plan.vary.aligns === undefined ? {} : { aligns: plan.vary.aligns }),
    ...(plan.lossRate === undefined ? {} : { lossRate: plan.lossRate }),
    ...(plan.billStepBytes === undefined ? {} : { billStepBytes: plan.billStepBytes }),
    ...(plan.damage === undefined ? {} : { damage: plan.damage }),
    ...(plan.device === undefined ? {} : { device: plan.device }),
    decision: plan.decision,
    budget: budgetOf(plan.budget),
    split: describeSplit(rule),
    ageing: rule !== undefined && rule.order === 'in_time' && rule.folds === undefined,
    ...(plan.timing.repeats === 0 ? {} : { timing: plan.timing }),
  };
}
