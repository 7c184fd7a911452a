import { dirname, join } from 'node:path';
import type { Command } from 'commander';
import { choiceFileOf, chooseFromRun } from '../../compare/choice.ts';
import { readMeasured, withMeasured } from '../../compare/measured.ts';
import { pooledLoadedRun } from '../../compare/pooled-messages.ts';
import { loadRun } from '../../compare/read-messages.ts';
import { cellNamed, whyOf } from '../../compare/why.ts';
import { readInputFile } from '../../corpus/read-file.ts';
import { InputError } from '../../errors/errors.ts';
import type { RunRecord } from '../../harness/run-record.ts';
import { writeWhole } from '../../harness/write-whole.ts';
import { chooseScreen } from '../../report/choose-screen.ts';
import { whyScreen } from '../../report/why-screen.ts';
import { CommandEnd, exitCodes } from '../exit.ts';
import { terminalColumns, writeStandardOutput } from '../output.ts';

interface ChooseOptions {
  readonly why?: readonly string[];
  readonly measured?: string;
  readonly json?: boolean;
}

async function measuredRecord(record: RunRecord, file: string | undefined): Promise<RunRecord> {
  if (file === undefined) return record;
  const text = new TextDecoder().decode(await readInputFile(file, file));
  return withMeasured(record, readMeasured(text, file, record));
}

async function choose(run: string, options: ChooseOptions): Promise<void> {
  const { record: loaded, messages } = pooledLoadedRun(await loadRun(run));
  const record = await measuredRecord(loaded, options.measured);
  if (options.why !== undefined) {
    const [a, b, ...more] = options.why;
    if (b === undefined || more.length > 0) {
      throw new InputError('--why takes two cells', { got: options.why.join(' ') });
    }
    const why = whyOf(record, messages, cellNamed(record, a), cellNamed(record, b));
    if (options.json) {
      const { difference, lines, comparison } = why;
      const shown = {
        a: why.a.id,
        b: why.b.id,
        difference,
        lines,
        ...(comparison === undefined ? {} : { comparison }),
      };
      return writeStandardOutput(`${JSON.stringify(shown, null, 1)}\n`);
    }
    return writeStandardOutput(whyScreen(record, why, terminalColumns()));
  }
  if (record.partial) {
    process.stderr.write(
      'bitassay: the run was interrupted: cells that are missing cannot be chosen\n',
    );
  }
  const choice = chooseFromRun(record, messages);
  const file = choiceFileOf(record, choice);
  const folder = run.endsWith('.json') ? dirname(run) : run;
  await writeWhole(join(folder, 'choice.json'), `${JSON.stringify(file, null, 1)}\n`);
  await writeStandardOutput(
    options.json
      ? `${JSON.stringify(file, null, 1)}\n`
      : chooseScreen(record, choice, { columns: terminalColumns(), run }),
  );
  if (choice.corpora.some(({ pick }) => pick === undefined))
    throw new CommandEnd(exitCodes.answerIsNo);
}

/** `bitassay choose RUN`: from figures to a decision. */
export function registerChoose(program: Command): void {
  program
    .command('choose')
    .summary('which cell of a run to ship, under the plan’s limits and costs')
    .description(
      'Holds every cell of a run against the limits of its plan, shows the trade-off front, picks one for each corpus and says what would change the pick. Leaves choice.json in the run’s folder.',
    )
    .argument('<run>', 'folder of a run')
    .option('--why <cells...>', 'put two cells side by side, by id or a part of it')
    .option(
      '--measured <file>',
      'CSV of your own figures: cell and flash_bytes, ram_bytes, cycles_per_symbol',
    )
    .option('--json', 'print choice.json, or the comparison')
    .addHelpText(
      'after',
      `
Exit code 1: for some corpus nothing meets the limits.

Examples:
  bitassay choose plan.run
  bitassay choose plan.run --why events/huffman events/arith:order=1
  bitassay choose plan.run --measured device.csv`,
    )
    .action((run: string, options: ChooseOptions) => choose(run, options));
}
