import type { Command } from 'commander';
import { InputError } from '../../errors/errors.ts';
import { CALIBRATION_SIZES, ROUGH_SIZES, runCalibration } from '../../harness/calibrate.ts';
import { calibrationSourceNames } from '../../harness/calibrate-sources.ts';
import { calibrateScreen } from '../../report/calibrate-screen.ts';
import { wrapText } from '../../report/figures.ts';
import { CommandEnd, exitCodes } from '../exit.ts';
import { whileInterruptible } from '../interrupt.ts';
import { terminalColumns } from '../output.ts';
import { addOutputOptions, type OutputOptions, writeResult } from '../output-options.ts';
import { ProgressLine } from '../progress.ts';

interface CalibrateOptions extends OutputOptions {
  readonly rough?: boolean;
  readonly source: readonly string[];
  readonly sizes?: readonly number[];
}

/** Beyond these, sources take more memory than counting is allowed, or show nothing. */
const LEAST_SIZE = 100;
const MOST_SIZE = 1e7;

function readSizes(text: string): number[] {
  return text.split(',').map((part) => {
    const size = Number(part);
    if (part.trim() === '' || !Number.isInteger(size) || size < LEAST_SIZE || size > MOST_SIZE) {
      throw new InputError(`cannot use ${JSON.stringify(part)} as a number of symbols`, {
        expected: `whole numbers from ${LEAST_SIZE} to ${MOST_SIZE}, as in 1000,10000`,
        got: text,
      });
    }
    return size;
  });
}

const collect = (value: string, before: readonly string[]): string[] => [...before, value];

async function calibrate(options: CalibrateOptions): Promise<void> {
  const rough = options.rough === true;
  const sizes = options.sizes ?? (rough ? ROUGH_SIZES : CALIBRATION_SIZES);
  const progress = new ProgressLine(true, 'thousand symbols');
  const record = await whileInterruptible((interrupted) =>
    runCalibration(
      { sources: options.source, sizes: [...new Set(sizes)].sort((a, b) => a - b), rough },
      { progress: (state) => progress.show(state), interrupted },
    ),
  ).finally(() => progress.stop());
  await writeResult(record, options, () => calibrateScreen(record, { columns: terminalColumns() }));
  if (record.partial) throw new CommandEnd(exitCodes.interrupted);
  if (record.broken > 0) throw new CommandEnd(exitCodes.answerIsNo);
}

/** `bitassay calibrate`: estimators and coders, proved on sources whose entropy rate is known exactly. */
export function registerCalibrate(program: Command): void {
  const command = program
    .command('calibrate')
    .summary('prove estimators and coders on sources whose entropy rate is known exactly')
    .description(
      'Draws seeded sources whose entropies are known by calculation, asks the estimators, their intervals and the coders about them, and says of each answer whether it holds.',
    )
    .option('--rough', 'short stretches and fewer of them: a minute or two')
    .option('--source <name>', 'only this source; may be repeated', collect, [])
    .option('--sizes <n,n…>', 'lengths of the stretches, in symbols', readSizes);
  addOutputOptions(command)
    .addHelpText(
      'after',
      `
Sources:
${wrapText(calibrationSourceNames.join(', '), 96, '  ').join('\n')}

Examples:
  bitassay calibrate --rough
  bitassay calibrate --source sticky-1 --sizes 10000,100000
  bitassay calibrate --json -o calibration.json

Exit codes: 0 every promise holds, 1 one is broken, 130 interrupted (what was done is shown).`,
    )
    .action((options: CalibrateOptions) => calibrate(options));
}
