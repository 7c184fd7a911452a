import { readPlan } from '../corpus/plan.ts';
import type { RunHooks } from './pause.ts';
import { requestOf } from './plan-request.ts';
import { type RunResult, runAll } from './run-all.ts';
import { writeRunFolder } from './run-folder.ts';

/** What may be said besides the plan. */
export interface RunPlanOptions extends RunHooks {
  /** Only the cells whose id contains this text. */
  readonly only?: string;
  /** Folder to leave the record and the message figures in; nothing is written unless it is given. */
  readonly folder?: string;
}

/**
 * Runs a plan file: `bitassay run` as a function.
 * @throws InputError for a plan or data that cannot be used; a cell that fails is in the record, with its reason
 */
export async function runPlan(planFile: string, options: RunPlanOptions = {}): Promise<RunResult> {
  const { only, folder, ...hooks } = options;
  const request = await requestOf(await readPlan(planFile));
  const result = await runAll(only === undefined ? request : { ...request, only }, hooks);
  if (folder !== undefined) await writeRunFolder(folder, result);
  return result;
}
