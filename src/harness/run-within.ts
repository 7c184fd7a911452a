import type { Plan } from '../corpus/plan.ts';
import type { RunHooks } from './pause.ts';
import { requestOf } from './plan-request.ts';
import type { RunRequest } from './run-all.ts';
import { type MannerResult, type RunManner, runWith } from './run-with.ts';
import { partByMemory, streamedRequestOf } from './stream-request.ts';
import { joinResults, runStreamed, type StreamedRequest } from './stream-run.ts';

/** A plan as it is run: what memory holds, and what is read in pieces. */
export interface PlannedRun {
  readonly request: RunRequest;
  /** Absent where the plan bounds no memory, or everything fits. */
  readonly inPieces?: StreamedRequest;
}

/**
 * Reads a plan's corpora, as a whole or once in pieces.
 * @param only  only the cells whose id contains this text
 */
export async function plannedRunOf(plan: Plan, only?: string): Promise<PlannedRun> {
  const own = only === undefined ? {} : { only };
  const { fitting, streamed } = await partByMemory(plan);
  const request = { ...(await requestOf(fitting)), ...own };
  if (streamed.length === 0) return { request };
  return { request, inPieces: { ...(await streamedRequestOf(plan, streamed)), ...own } };
}

/** Runs first what memory holds, then what is read in pieces, on this thread; one result of both. */
export async function runPlanned(
  { request, inPieces }: PlannedRun,
  hooks: RunHooks,
  manner: RunManner,
): Promise<MannerResult> {
  const whole = await runWith(request, hooks, manner);
  if (inPieces === undefined || whole.record.partial) return whole;
  return { ...whole, ...joinResults(whole, await runStreamed(inPieces, hooks)) };
}
