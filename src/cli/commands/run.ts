import { basename, join } from 'node:path';
import type { Command } from 'commander';
import { countCandidates } from '../../coders/candidate.ts';
import { compareRun } from '../../compare/compare-run.ts';
import { type Plan, readPlan } from '../../corpus/plan.ts';
import { InputError } from '../../errors/errors.ts';
import type { Cell } from '../../harness/cells.ts';
import { estimateSeconds } from '../../harness/estimate.ts';
import { cellsOf, type RunRequest, type RunResult } from '../../harness/run-all.ts';
import { writeRunFolder } from '../../harness/run-folder.ts';
import { plannedRunOf, runPlanned } from '../../harness/run-within.ts';
import { streamedCellsOf } from '../../harness/stream-run.ts';
import { countText, durationText } from '../../report/figures.ts';
import { notFilledText, runScreen } from '../../report/run-screen.ts';
import { cacheNotes } from '../cache-notes.ts';
import { CommandEnd, exitCodes } from '../exit.ts';
import { whileInterruptible } from '../interrupt.ts';
import { addMemoryOptions, type MemoryOptions, withMemoryOptions } from '../memory-options.ts';
import { terminalColumns, terminalShowsUnicode, writeStandardOutput } from '../output.ts';
import { ProgressLine } from '../progress.ts';
import { numberOption } from '../source-options.ts';

interface RunOptions extends MemoryOptions {
  readonly output?: string;
  readonly only?: string;
  readonly cells?: boolean;
  readonly many?: boolean;
  readonly fresh?: boolean;
  readonly workers?: number;
  readonly json?: boolean;
}

/** More cells than this are run only when asked for twice. */
const MANY_CELLS = 2000;

function defaultFolder(planFile: string): string {
  return join(
    planFile.replace(/[^/\\]*$/, ''),
    `${basename(planFile).replace(/\.ya?ml$/i, '')}.run`,
  );
}

/** Refuses, before any file is read, a plan whose ranges stand for more candidates than anybody means. */
function guardCandidates(plan: Plan): void {
  const count = plan.candidates.reduce((sum, text) => sum + countCandidates(text), 0);
  if (count <= 100_000) return;
  throw new InputError(`the plan stands for ${countText(count)} candidates`, {
    file: plan.file,
    key: 'candidates',
    expected: 'at most 100 000',
    advice: 'Narrow the ranges.',
  });
}

async function guardCells(request: RunRequest, options: RunOptions): Promise<void> {
  const { cells } = cellsOf(request);
  if (cells.length === 0) {
    throw new InputError('no cell is left to run', {
      ...(options.only === undefined ? {} : { got: `--only ${options.only}` }),
      advice: 'bitassay run PLAN.yaml --cells lists the cells there are.',
    });
  }
  if (cells.length <= MANY_CELLS || options.many) return;
  const seconds = await estimateSeconds(cells, request.corpora);
  throw new InputError(
    `this plan has ${countText(cells.length)} cells and would take about ${durationText(seconds)} without timing`,
    {
      expected: `at most ${countText(MANY_CELLS)} cells unless asked for`,
      advice: 'Narrow a range or use --only TEXT; --many runs them all.',
    },
  );
}

/** @param others  cells of data that are read in pieces, whose time is not guessed */
async function listCellsOf(
  request: RunRequest,
  others: readonly Cell[],
  json: boolean,
): Promise<void> {
  const { cells: own, undeclared, notFilled } = cellsOf(request);
  const cells = [...own, ...others];
  const seconds = await estimateSeconds(own, request.corpora);
  if (json) {
    const list = {
      cells: cells.map((c) => c.id),
      undeclared,
      ...(notFilled === 0 ? {} : { not_filled: notFilled }),
      seconds: Math.round(seconds),
    };
    await writeStandardOutput(`${JSON.stringify(list, null, 1)}\n`);
    return;
  }
  const lines = [
    ...cells.map((cell) => cell.id),
    '',
    `${countText(cells.length)} cells, about ${durationText(seconds)} without timing (a guess from the beginning of the data).${
      others.length === 0
        ? ''
        : ` The ${countText(others.length)} that read data in pieces are not in it.`
    }`,
    ...(undeclared === 0
      ? []
      : [`${countText(undeclared)} combinations give no cell: the coder does not declare them.`]),
    ...(notFilled === 0 ? [] : [notFilledText(notFilled)]),
  ];
  await writeStandardOutput(`${lines.join('\n')}\n`);
}

/**
 * Runs a plan and writes its folder, with progress and notes on standard error; lists its cells instead where that is asked for.
 * @returns the folder, and what the run came to; undefined where cells were listed
 */
export async function runIntoFolder(
  planFile: string,
  options: RunOptions,
): Promise<{ folder: string; result: RunResult } | undefined> {
  const plan = withMemoryOptions(await readPlan(planFile), options);
  guardCandidates(plan);
  const planned = await plannedRunOf(plan, options.only);
  const { request, inPieces } = planned;
  const others = inPieces === undefined ? [] : streamedCellsOf(inPieces).cells;
  if (options.cells) {
    await listCellsOf(request, others, options.json === true);
    return undefined;
  }
  if (others.length === 0) await guardCells(request, options);
  // A split that nothing uses needs no word.
  const open = plan.chosen.filter(
    (choice) =>
      request.corpora.some((corpus) => corpus.train !== undefined) ||
      inPieces?.corpora.some((corpus) => corpus.train !== undefined) ||
      !choice.startsWith('split'),
  );
  for (const choice of open) process.stderr.write(`bitassay: the plan leaves open ${choice}\n`);
  const progress = new ProgressLine(true);
  const { fresh = false, workers } = options;
  // Each lane holds models of its own.
  const lanes = workers ?? (plan.memoryBytes === undefined ? undefined : 1);
  const result = await whileInterruptible((interrupted) =>
    runPlanned(
      planned,
      { progress: (state) => progress.show(state), interrupted },
      { fresh, ...(lanes === undefined ? {} : { lanes }) },
    ),
  ).finally(() => progress.stop());
  for (const note of cacheNotes(result)) process.stderr.write(`bitassay: ${note}\n`);
  const folder = options.output ?? defaultFolder(planFile);
  await writeRunFolder(folder, result);
  process.stderr.write(`bitassay: record in ${join(folder, 'run.json')}\n`);
  return { folder, result };
}

async function runPlanFile(planFile: string, options: RunOptions): Promise<void> {
  const run = await runIntoFolder(planFile, options);
  if (run === undefined) return;
  const { folder, result } = run;
  const { record } = result;
  if (options.json) {
    await writeStandardOutput(`${JSON.stringify(record, null, 1)}\n`);
  } else {
    await writeStandardOutput(
      runScreen(record, {
        columns: terminalColumns(),
        ascii: !terminalShowsUnicode(),
        compared: compareRun(record, result.messages),
        next: `bitassay choose ${folder}`,
      }),
    );
  }
  if (record.partial) throw new CommandEnd(exitCodes.interrupted);
  if (record.cells.some((cell) => !cell.verified)) throw new CommandEnd(exitCodes.cellFailed);
}

/** `bitassay run PLAN`: every cell of a plan, verified, accounted and timed. */
export function registerRun(program: Command): void {
  const command = program
    .command('run')
    .summary('run a plan: the product’s own framing and table policies')
    .description(
      'Trains, codes, decodes, compares, accounts and times every cell of a plan, and leaves a run record in a folder.',
    )
    .argument('<plan>', 'plan file (YAML)')
    .option('-o, --output <folder>', 'folder of the run record (default: the plan’s name + .run)')
    .option('--only <text>', 'only the cells whose id contains this text')
    .option('--cells', 'list the cells and guess the time, without running them')
    .option('--many', `run a plan of more than ${MANY_CELLS} cells`)
    .option('--fresh', 'take nothing from the cache')
    .option(
      '--workers <count>',
      'cells coded at a time (default: one a core)',
      numberOption(1, true),
    )
    .option('--json', 'print the run record');
  addMemoryOptions(command)
    .addHelpText(
      'after',
      `
Examples:
  bitassay run plan.yaml
  bitassay run plan.yaml --cells
  bitassay run plan.yaml --only telemetry/arith -o arith.run
  bitassay run plan.yaml --json > run.json

Bits are coded by several workers at once, times are taken one cell at a time. What a cell came to is kept in a cache, so that
an interrupted run goes on where it ended and a changed candidate runs its own cells only; times are always taken anew.`,
    )
    .action((planFile: string, options: RunOptions) => runPlanFile(planFile, options));
}
