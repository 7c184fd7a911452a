import { basename } from 'node:path';
import type { Command } from 'commander';
import { readPlan } from '../../corpus/plan.ts';
import { reconcileSentence } from '../../entropy/reconcile.ts';
import { InputError } from '../../errors/errors.ts';
import type { CorpusData } from '../../harness/corpus-data.ts';
import { type EntropyReport, entropyReport } from '../../harness/entropy-report.ts';
import { loadCorpusData } from '../../harness/load-corpus-data.ts';
import { fitsMemory } from '../../harness/memory-budget.ts';
import type { RunHooks } from '../../harness/pause.ts';
import { corporaOfPlan } from '../../harness/plan-request.ts';
import type { StreamedData } from '../../harness/stream-data.ts';
import { streamedEntropyReport } from '../../harness/stream-entropy.ts';
import { openStreamed, partByMemory, streamedRequestOf } from '../../harness/stream-request.ts';
import { entropyScreen } from '../../report/entropy-screen.ts';
import { CommandEnd, exitCodes } from '../exit.ts';
import { whileInterruptible } from '../interrupt.ts';
import { addMemoryOptions, type MemoryOptions, withMemoryOptions } from '../memory-options.ts';
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

interface EntropyOptions extends SourceOptions, OutputOptions, MemoryOptions {
  readonly upto: number;
  readonly rough?: boolean;
  readonly all?: boolean;
  readonly ascii?: boolean;
  readonly resolve: number;
}

const isPlan = (path: string): boolean => /\.ya?ml$/i.test(path);

/** What is asked about: corpora that memory holds, and those that are read in pieces. */
interface Asked {
  readonly corpora: readonly CorpusData[];
  readonly streamed: readonly StreamedData[];
}

async function corporaOf(paths: readonly string[], options: EntropyOptions): Promise<Asked> {
  const { memory } = options;
  if (!paths.some(isPlan)) {
    const name = paths.length === 1 ? basename(paths[0]) : 'files';
    const spec = specFromOptions(name, paths, options);
    const folder = process.cwd();
    if (memory !== undefined && !(await fitsMemory(spec, folder, memory)))
      return { corpora: [], streamed: await openStreamed([spec], folder, undefined, memory) };
    return { corpora: [await loadCorpusData(spec, folder, undefined)], streamed: [] };
  }
  if (paths.length > 1) {
    throw new InputError('a plan stands alone', {
      got: paths.join(' '),
      advice: 'Give one plan, or files that are no plan.',
    });
  }
  const plan = withMemoryOptions(await readPlan(paths[0]), options);
  const { fitting, streamed } = await partByMemory(plan);
  return {
    corpora: await corporaOfPlan(fitting),
    streamed: streamed.length === 0 ? [] : (await streamedRequestOf(plan, streamed)).corpora,
  };
}

async function reportOf(
  { corpora, streamed }: Asked,
  options: EntropyOptions,
  hooks: RunHooks,
): Promise<EntropyReport> {
  const { upto, rough = false, all = false, resolve } = options;
  const whole = await entropyReport(corpora, { upto, rough, all, difference: resolve }, hooks);
  if (streamed.length === 0 || whole.partial) return whole;
  const pieces = await streamedEntropyReport(streamed, { upto, all }, hooks);
  return {
    corpora: [...whole.corpora, ...pieces.corpora],
    entropy: [...whole.entropy, ...pieces.entropy],
    partial: pieces.partial,
  };
}

async function showEntropy(paths: readonly string[], options: EntropyOptions): Promise<void> {
  const asked = await corporaOf(paths, options);
  const progress = new ProgressLine(true);
  const report = await whileInterruptible((interrupted) =>
    reportOf(asked, options, { progress: (state) => progress.show(state), interrupted }),
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
  addMemoryOptions(command);
  addOutputOptions(command)
    .addHelpText(
      'after',
      `
Examples:
  bitassay entropy telemetry.bin
  bitassay entropy events.log --messages lines --upto 3
  bitassay entropy telemetry.bin --all --resolve 0.002
  bitassay entropy plan.yaml --json
  bitassay entropy large.bin --upto 2 --rough
  bitassay entropy year.bin --memory 512MB`,
    )
    .action((files: string[], options: EntropyOptions) => showEntropy(files, options));
}
