import { readPlan } from '../corpus/plan.ts';
import type { RunHooks } from './pause.ts';
import { writeRunFolder } from './run-folder.ts';
import type { MannerResult, RunManner } from './run-with.ts';
import { plannedRunOf, runPlanned } from './run-within.ts';

/** What may be said besides the plan. */
export interface RunPlanOptions extends RunHooks, RunManner {
  /** Only the cells whose id contains this text. */
  readonly only?: string;
  /** Folder to leave the record and the message figures in; nothing is written unless it is given. */
  readonly folder?: string;
}

/**
 * Runs a plan file: `bitassay run` as a function.
 * @throws InputError for a plan or data that cannot be used; a cell that fails is in the record, with its reason
 */
export async function runPlan(
  planFile: string,
  options: RunPlanOptions = {},
): Promise<MannerResult> {
  const { only, folder } = options;
  const plan = await readPlan(planFile);
  const manner = plan.memoryBytes === undefined ? options : { lanes: 1, ...options };
  const result = await runPlanned(await plannedRunOf(plan, only), options, manner);
  if (folder !== undefined) await writeRunFolder(folder, result);
  return result;
}
