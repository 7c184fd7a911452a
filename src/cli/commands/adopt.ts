import { dirname, join, resolve } from 'node:path';
import type { Command } from 'commander';
import { InputError } from '../../errors/errors.ts';
import { type Allow, allowOf, parseAllow } from '../../gate/allow.ts';
import { baselineOf } from '../../gate/baseline.ts';
import {
  BASELINE_NAME,
  baselineText,
  historyFileOf,
  readBaselineIfAny,
} from '../../gate/baseline-file.ts';
import { type Creep, creepOf } from '../../gate/creep.ts';
import { type Gate, gateRun } from '../../gate/gate.ts';
import { adoptedRunOf, appendHistory, readHistory } from '../../gate/history.ts';
import { readRunRecord } from '../../harness/run-folder.ts';
import type { RunRecord } from '../../harness/run-record.ts';
import { writeWhole } from '../../harness/write-whole.ts';
import { countText } from '../../report/figures.ts';
import { creepLines } from '../../report/gate-history.ts';
import { printable } from '../../report/gate-words.ts';
import { CommandEnd, exitCodes } from '../exit.ts';
import { checkWritable, terminalColumns, writeStandardOutput } from '../output.ts';

interface AdoptOptions {
  readonly output?: string;
  readonly allow?: string;
  readonly reason?: string;
}

/** The baseline of a run: beside its folder, which lies beside the plan unless -o put it elsewhere. */
export function baselineBeside(run: string): string {
  const folder = run.endsWith('.json') ? dirname(run) : run;
  const above = dirname(folder);
  // The folder above `.` is not `.`.
  const real = dirname(resolve(folder));
  return join(resolve(above) === real ? above : real, BASELINE_NAME);
}

/** The record of a run that was not interrupted. */
export async function wholeRecord(run: string): Promise<RunRecord> {
  const record = await readRunRecord(run);
  if (!record.partial) return record;
  throw new InputError(`${run}: this run was interrupted`, {
    file: run,
    expected: 'a run that came to its end',
    advice: 'Run the plan again; what was done is taken from the cache.',
  });
}

/** What `--allow` says, or else the plan of the record. */
export function allowGiven(text: string | undefined, record: RunRecord): Allow {
  const plan = allowOf(record.plan.gate);
  return text === undefined ? plan : parseAllow(text, plan);
}

function whyRefused(creep: Creep, gate: Gate | undefined): string[] {
  const failed = (gate?.cells ?? []).filter(({ checks }) =>
    checks.some(({ figure, verdict }) => figure === 'verified' && verdict === 'lost'),
  );
  return [
    ...(creep.beyond.length === 0
      ? []
      : [`${creep.beyond.length} of its cells take more bits than is allowed over their best`]),
    ...(failed.length === 0 ? [] : [`${failed.length} failed that did not fail before`]),
    ...(gate !== undefined && gate.cells.length === 0
      ? ['none of its cells is in the baseline that it would replace']
      : []),
  ];
}

async function adopt(run: string, options: AdoptOptions): Promise<void> {
  const reason = options.reason?.trim();
  if (reason === '') {
    throw new InputError('--reason is empty', { expected: 'why more bits are worth it' });
  }
  const record = await wholeRecord(run);
  const allow = allowGiven(options.allow, record);
  const file = options.output ?? baselineBeside(run);
  checkWritable(file, true);
  const historyFile = historyFileOf(file);
  const [before, history] = [await readBaselineIfAny(file), await readHistory(historyFile)];
  const adopted = adoptedRunOf(record, new Date(), {
    allow,
    ...(reason === undefined ? {} : { reason }),
  });
  const cellCount = Object.keys(adopted.cells).length;
  if (cellCount === 0) {
    throw new InputError(`${run}: no cell of this run can be held to`, {
      file: run,
      expected: 'a verified cell that is no reference',
    });
  }
  const creep = creepOf(history, adopted, allow);
  const columns = terminalColumns();
  const refused = whyRefused(creep, before && gateRun(before, record, allow));
  await writeStandardOutput(
    creepLines(creep, history, columns)
      .map((line) => `${line}\n`)
      .join(''),
  );
  if (refused.length > 0 && reason === undefined) {
    process.stderr.write(
      `bitassay: not adopted: ${refused.join('; ')}\n  Say why it is worth it, and it is kept: --reason "…"; another baseline: -o FILE\n`,
    );
    throw new CommandEnd(exitCodes.answerIsNo);
  }
  await writeWhole(file, baselineText(baselineOf(record)));
  await appendHistory(historyFile, adopted);
  await writeStandardOutput(
    ` Adopted: ${countText(cellCount)} ${cellCount === 1 ? 'cell' : 'cells'} of ${printable(record.plan.title)}, in ${file}\n` +
      ` History: ${countText(history.length + 1)} ${history.length === 0 ? 'run' : 'runs'} in ${historyFile}\n` +
      ` Next: keep both files in version control; bitassay gate ${run} --baseline ${file}\n`,
  );
}

/** `bitassay adopt RUN`: what later runs are held against. */
export function registerAdopt(program: Command): void {
  program
    .command('adopt')
    .summary('keep a run as the baseline that later runs are held against')
    .description(
      'Writes the figures of a run into a small file for version control, one figure a line, and adds a line to the history beside it. Cells that take more bits than allowed over their best in history are refused unless a reason is given.',
    )
    .argument('<run>', 'folder of a run')
    .option(
      '-o, --output <file>',
      `the baseline (default: ${BASELINE_NAME} beside the run’s folder)`,
    )
    .option('--allow <growth>', 'instead of gate.allow of the plan, as in total=8,each_file=0.5%')
    .option('--reason <text>', 'why more bits than allowed are worth it; kept in the history')
    .addHelpText(
      'after',
      `
Exit code 1: refused, since no reason was given.

Examples:
  bitassay adopt plan.run
  bitassay adopt plan.run --reason "checks of 4 bytes, asked for by the ground station"`,
    )
    .action((run: string, options: AdoptOptions) => adopt(run, options));
}
