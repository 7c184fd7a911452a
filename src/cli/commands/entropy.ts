import { basename } from 'node:path';
import type { Command } from 'commander';
import { readPlan } from '../../corpus/plan.ts';
import { reconcileSentence } from '../../entropy/reconcile.ts';
import { InputError } from '../../errors/errors.ts';
import type { CorpusData } from '../../harness/corpus-data.ts';
import { type EntropyReport, entropyReport } from '../../harness/entropy-report.ts';
import { loadCorpusData } from '../../harness/load-corpus-data.ts';
import { requestOf } from '../../harness/plan-request.ts';
import { entropyScreen } from '../../report/entropy-screen.ts';
import { CommandEnd, exitCodes } from '../exit.ts';
import { whileInterruptible } from '../interrupt.ts';
import { terminalColours, terminalColumns, terminalShowsUnicode } from '../output.ts';
import { addOutputOptions, type OutputOptions, writeResult } from '../output-options.ts';
import { ProgressLine } from '../progress.ts';
import {
  addSourceOptions,
  numberOption,
  type SourceOptions,
  specFromOptions,
  typedOptions,
} from '../source-options.ts';

interface EntropyOptions extends SourceOptions, OutputOptions {
  readonly upto: number;
  readonly rough?: boolean;
  readonly all?: boolean;
  readonly ascii?: boolean;
  readonly resolve: number;
}

const isPlan = (path: string): boolean => /\.ya?ml$/i.test(path);

async function corporaOf(
  paths: readonly string[],
  options: EntropyOptions,
): Promise<readonly CorpusData[]> {
  if (!paths.some(isPlan)) {
    const name = paths.length === 1 ? basename(paths[0]) : 'files';
    return [await loadCorpusData(specFromOptions(name, paths, options), process.cwd(), undefined)];
  }
  if (paths.length > 1) {
    throw new InputError('a plan stands alone', {
      got: paths.join(' '),
      advice: 'Give one plan, or files that are no plan.',
    });
  }
  return (await requestOf(await readPlan(paths[0]))).corpora;
}

async function showEntropy(paths: readonly string[], options: EntropyOptions): Promise<void> {
  const corpora = await corporaOf(paths, options);
  const progress = new ProgressLine(true);
  const report: EntropyReport = await whileInterruptible((interrupted) =>
    entropyReport(
      corpora,
      {
        upto: options.upto,
        rough: options.rough === true,
        all: options.all === true,
        difference: options.resolve,
      },
      {
        progress: (state) => progress.show(state),
        interrupted,
      },
    ),
  ).finally(() => progress.stop());
  const colours = terminalColours();
  await writeResult({ corpora: report.corpora, entropy: report.entropy }, options, () =>
    report.corpora
      .map((corpus) =>
        entropyScreen(
          corpus,
          report.entropy.filter((e) => e.corpus === corpus.name),
          {
            columns: terminalColumns(),
            all: options.all === true,
            ascii: options.ascii === true || !terminalShowsUnicode(),
            ...(colours.isColorSupported && options.output === undefined
              ? { dim: colours.dim }
              : {}),
            sentenceOf: (entropy) =>
              reconcileSentence(entropy.orders.map((o) => ({ ...o, useful: o.useful }))),
            next: isPlan(paths[0])
              ? `bitassay run ${paths[0]}`
              : `bitassay try ${paths.join(' ')}${typedOptions(options)}`,
          },
        ),
      )
      .join('\n'),
  );
  if (report.partial) throw new CommandEnd(exitCodes.interrupted);
}

/** `bitassay entropy`: how low the rate can go, by order. */
export function registerEntropy(program: Command): void {
  const command = program
    .command('entropy')
    .summary('how low the rate can go: entropy by order, floor and band')
    .description(
      'Estimates the entropy of symbols given 0 to K predecessors, says which orders these data suffice for and which save bits, sets the floor in its band, and looks for change along the data.',
    )
    .argument(
      '<file...>',
      'files or patterns, or one plan (YAML): then the part of each corpus that is coded',
    );
  addSourceOptions(command)
    .option('--upto <order>', 'highest order counted', numberOption(0, true), 4)
    .option(
      '--rough',
      'leave out what takes minutes: no coder is run, so no ceiling, and nothing on which orders save bits',
    )
    .option('--all', 'also other estimators, match lengths, extrapolation and blocks of symbols')
    .option(
      '--resolve <bits>',
      'say how many symbols it takes to tell such a difference in bits per symbol',
      numberOption(Number.MIN_VALUE, false),
      0.01,
    )
    .option('--ascii', 'no characters beyond ASCII');
  addOutputOptions(command)
    .addHelpText(
      'after',
      `
Examples:
  bitassay entropy telemetry.bin
  bitassay entropy events.log --messages lines --upto 3
  bitassay entropy telemetry.bin --all --resolve 0.002
  bitassay entropy plan.yaml --json
  bitassay entropy large.bin --upto 2 --rough`,
    )
    .action((files: string[], options: EntropyOptions) => showEntropy(files, options));
}
