import type { CorpusSpec } from '../corpus/corpus.ts';
import type { SplitRule } from '../corpus/decide-split.ts';
import type { Plan } from '../corpus/plan.ts';
import { InputError } from '../errors/errors.ts';
import { describeSplit } from './load-corpus-data.ts';
import { fitsMemory, streamingLimits } from './memory-budget.ts';
import { candidatesOf, splitRuleOf } from './plan-request.ts';
import { openStreamedData, type StreamedData } from './stream-data.ts';
import type { StreamedRequest } from './stream-run.ts';

/** Candidates for data that memory does not hold, where none is named. */
export const USUAL_STREAMED_CANDIDATES: readonly string[] = ['huffman', 'arith:order=0..2'];

/**
 * Reads corpora once, in pieces.
 * @throws what {@link openStreamedData} throws
 */
export async function openStreamed(
  specs: readonly CorpusSpec[],
  baseFolder: string,
  rule: SplitRule | undefined,
  memoryBytes: number,
): Promise<StreamedData[]> {
  const { maxMessages } = streamingLimits(memoryBytes);
  const corpora: StreamedData[] = [];
  for (const spec of specs)
    corpora.push(await openStreamedData(spec, baseFolder, rule, { maxMessages }));
  return corpora;
}

/** A request with the bound of its models. */
export function boundedRequest(request: Omit<StreamedRequest, 'modelBytes'>): StreamedRequest {
  return { ...request, modelBytes: streamingLimits(request.memoryBytes).modelBytes };
}

/**
 * A plan parted by its memory: the same with the corpora that fit, which may be none, and those that are read in pieces.
 * @throws what {@link fitsMemory} throws
 */
export async function partByMemory(
  plan: Plan,
): Promise<{ fitting: Plan; streamed: readonly CorpusSpec[] }> {
  const { memoryBytes, corpora } = plan;
  if (memoryBytes === undefined) return { fitting: plan, streamed: [] };
  const fits: boolean[] = [];
  for (const spec of corpora) fits.push(await fitsMemory(spec, plan.folder, memoryBytes));
  return {
    fitting: { ...plan, corpora: corpora.filter((_, i) => fits[i]) },
    streamed: corpora.filter((_, i) => !fits[i]),
  };
}

/**
 * What a plan asks of corpora that are read in pieces.
 * @throws InputError for what is varied, beside what {@link openStreamed} throws
 */
export async function streamedRequestOf(
  plan: Plan,
  specs: readonly CorpusSpec[],
): Promise<StreamedRequest> {
  const { memoryBytes = 0, vary } = plan;
  if (Object.keys(vary).length > 0) {
    throw new InputError('nothing is varied of data that are read in pieces', {
      file: plan.file,
      line: plan.lineOf('vary'),
      key: 'vary',
      expected: `data that the memory holds, or no vary`,
      got: specs.map(({ name }) => name).join(', '),
      advice: 'Allow more memory, take a sample, or leave vary out.',
    });
  }
  if (plan.damage !== undefined) {
    throw new InputError('no damage is simulated on data that are read in pieces', {
      file: plan.file,
      line: plan.lineOf('damage'),
      key: 'damage',
      expected: `data that the memory holds, or no damage`,
      got: specs.map(({ name }) => name).join(', '),
      advice: 'Allow more memory, take a sample, or leave damage out.',
    });
  }
  const candidates = candidatesOf(plan);
  const rule = splitRuleOf(plan, candidates);
  return boundedRequest({
    title: plan.title ?? plan.file,
    corpora: await openStreamed(specs, plan.folder, rule, memoryBytes),
    candidates,
    policies: plan.tables,
    resets: plan.reset,
    align: plan.align,
    ...(plan.lossRate === undefined ? {} : { lossRate: plan.lossRate }),
    ...(plan.billStepBytes === undefined ? {} : { billStepBytes: plan.billStepBytes }),
    ...(plan.device === undefined ? {} : { device: plan.device }),
    split: describeSplit(rule),
    memoryBytes,
  });
}
