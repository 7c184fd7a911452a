import type { Command } from 'commander';
import { InputError } from '../../errors/errors.ts';
import { type Growth, parseAllow } from '../../gate/allow.ts';
import { BASELINE_NAME, historyFileOf } from '../../gate/baseline-file.ts';
import { type AdoptedRun, readHistory } from '../../gate/history.ts';
import { stepsOf } from '../../gate/steps.ts';
import { historyScreen, leadingCells } from '../../report/gate-history.ts';
import { terminalColumns, writeStandardOutput } from '../output.ts';

interface HistoryOptions {
  readonly baseline: string;
  readonly cell?: string;
  readonly allow?: string;
  readonly json?: boolean;
}

/** Cells whose id contains the text, in any run. */
function cellsNamed(history: readonly AdoptedRun[], text: string): string[] {
  const ids = new Set(history.flatMap((run) => Object.keys(run.cells)));
  const found = [...ids].filter((id) => id.includes(text)).sort();
  if (found.length > 0) return found;
  throw new InputError(`no cell of the history has ${text} in its id`, {
    got: text,
    advice: 'bitassay history --json lists all cells.',
  });
}

async function history(options: HistoryOptions): Promise<void> {
  const file = options.baseline.endsWith('.jsonl')
    ? options.baseline
    : historyFileOf(options.baseline);
  const runs = await readHistory(file);
  if (runs.length === 0) {
    throw new InputError(`${file}: no run was adopted yet`, {
      file,
      advice: 'Adopt a run first: bitassay adopt RUN; or name its baseline: --baseline FILE',
    });
  }
  let allowed: Growth | undefined;
  if (options.allow !== undefined)
    allowed = parseAllow(options.allow, { total: 0, each_file: 0 }).total;
  const { cell } = options;
  const ids = cell === undefined ? leadingCells(runs) : cellsNamed(runs, cell);
  const steps = stepsOf(runs, allowed).filter(({ id }) => cell === undefined || ids.includes(id));
  if (options.json) {
    const told = steps.map((step) => ({ ...step, run: step.run + 1 }));
    await writeStandardOutput(`${JSON.stringify({ runs, steps: told }, null, 1)}\n`);
  } else {
    await writeStandardOutput(historyScreen(runs, steps, ids, terminalColumns()));
  }
}

/** `bitassay history`: adopted runs over time. */
export function registerHistory(program: Command): void {
  program
    .command('history')
    .summary('rate and speed over all adopted runs, and the run at which a step happened')
    .description(
      'Shows the rate and speed of cells over the runs that were adopted, and names each run at which a cell came to take more bits than was allowed, in one step or by many small ones.',
    )
    .option('--baseline <file>', 'the baseline that the history lies beside', BASELINE_NAME)
    .option('--cell <text>', 'cells whose id contains this text (default: the best of each corpus)')
    .option('--allow <growth>', 'what counts as a step, instead of what was allowed at the time')
    .option('--json', 'all runs and steps; runs are counted from 1')
    .addHelpText(
      'after',
      `
Examples:
  bitassay history
  bitassay history --cell telemetry/fields --allow 0.1%`,
    )
    .action((options: HistoryOptions) => history(options));
}
