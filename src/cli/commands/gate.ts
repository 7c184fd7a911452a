import { dirname, join } from 'node:path';
import { type Command, Option } from 'commander';
import { InputError } from '../../errors/errors.ts';
import { BASELINE_NAME, readBaseline } from '../../gate/baseline-file.ts';
import { type Gate, gateJson, gateRun } from '../../gate/gate.ts';
import { gateJunit } from '../../report/gate-junit.ts';
import { gateMarkdown } from '../../report/gate-markdown.ts';
import { gateScreen } from '../../report/gate-screen.ts';
import { CommandEnd, exitCodes } from '../exit.ts';
import {
  checkWritable,
  STANDARD_STREAM,
  terminalColumns,
  writeFileWhole,
  writeStandardOutput,
} from '../output.ts';
import { allowGiven, baselineBeside, wholeRecord } from './adopt.ts';
import { runIntoFolder } from './run.ts';

interface GateOptions {
  readonly baseline?: string;
  readonly allow?: string;
  readonly complete?: boolean;
  readonly to?: 'text' | 'md' | 'junit' | 'json';
  readonly json?: boolean;
  readonly output?: string;
}

const isPlan = (path: string): boolean => /\.ya?ml$/i.test(path);

/** Without anything to compare the answer would be yes to no question. */
function guardPaired(gate: Gate, file: string): void {
  if (gate.cells.some(({ reference }) => !reference)) return;
  const reasons = [...new Set(gate.unpaired.map(({ reason }) => reason))];
  throw new InputError('no cell of this run can be held against the baseline', {
    file,
    expected: 'cells of the same id, data and framing',
    got: reasons.slice(0, 3).join('; '),
    advice: 'Name its own baseline: --baseline FILE; or adopt the run: bitassay adopt RUN',
  });
}

function guardComplete(gate: Gate, file: string): void {
  const cells = gate.unpaired.map(({ id, reason }) => `${id} (${reason})`);
  const files = new Set(gate.cells.flatMap((c) => c.unpairedFiles.map((one) => one.file)));
  if (cells.length === 0 && files.size === 0) return;
  const named = cells.slice(0, 5).join(', ');
  throw new InputError('not all of the run and the baseline can be paired', {
    file,
    expected: 'the same cells and files in both, since --complete is given',
    got: `${cells.length} cells and ${files.size} files of one side only${named === '' ? '' : `: ${named}${cells.length > 5 ? ' …' : ''}`}`,
    advice: 'Run the whole plan, or adopt a run that has them.',
  });
}

async function gate(given: string, options: GateOptions): Promise<void> {
  const { json, to = json ? 'json' : 'text', output = STANDARD_STREAM } = options;
  if (json && to !== 'json') {
    throw new InputError(`--json and --to ${to} contradict each other`, {
      advice: 'Give one of them.',
    });
  }
  const planned = isPlan(given);
  const file =
    options.baseline ?? (planned ? join(dirname(given), BASELINE_NAME) : baselineBeside(given));
  // Before a run that may take long.
  const baseline = await readBaseline(file);
  checkWritable(output, true);
  let run = given;
  if (planned) {
    const done = await runIntoFolder(given, {});
    if (done!.result.record.partial) throw new CommandEnd(exitCodes.interrupted);
    run = done!.folder;
  }
  const record = await wholeRecord(run);
  const found = gateRun(baseline, record, allowGiven(options.allow, record));
  guardPaired(found, file);
  if (options.complete) guardComplete(found, file);
  const writers = {
    text: () => gateScreen(found, { columns: terminalColumns(), run, baseline: file }),
    md: () => gateMarkdown(found),
    junit: () => gateJunit(found),
    json: () => `${JSON.stringify(gateJson(found), null, 1)}\n`,
  };
  const text = writers[to]();
  if (output === STANDARD_STREAM) await writeStandardOutput(text);
  else await writeFileWhole(output, text, true);
  if (found.verdict === 'lost') throw new CommandEnd(exitCodes.answerIsNo);
}

/** `bitassay gate RUN|PLAN`: has anything been lost? */
export function registerGate(program: Command): void {
  program
    .command('gate')
    .summary(
      'hold a run against the baseline: fails where bits, sizes, speed or a decode got worse',
    )
    .description(
      'Pairs the cells and files of a run with those of the baseline and compares: bits exactly, up to gate.allow of the plan; sizes and operations exactly; speeds by interval within one class of machine; verification always. Bits of references are not gated.',
    )
    .argument('<run>', 'folder of a run, or a plan file to run first')
    .option(
      '--baseline <file>',
      `what to hold it against (default: ${BASELINE_NAME} beside the plan or the run’s folder)`,
    )
    .option('--allow <growth>', 'instead of gate.allow of the plan, as in total=8,each_file=0.5%')
    .option('--complete', 'refuse cells and files that only one side has')
    .addOption(
      new Option('--to <format>', 'format of the result').choices(['text', 'md', 'junit', 'json']),
    )
    .option('--json', 'the same as --to json')
    .option('-o, --output <file>', 'write the result to a file; one that exists is replaced')
    .addHelpText(
      'after',
      `
Exit codes: 0 all that held still holds, 1 something was lost, 2 nothing to compare or, with --complete, not all.

Examples:
  bitassay gate plan.run
  bitassay gate plan.yaml --to junit -o gate.xml
  bitassay gate plan.run --to md -o gate.md --allow total=0,each_file=0.5%`,
    )
    .action((given: string, options: GateOptions) => gate(given, options));
}
