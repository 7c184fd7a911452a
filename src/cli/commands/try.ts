import { basename } from 'node:path';
import { type Command, Option } from 'commander';
import { parseCandidates } from '../../coders/candidate.ts';
import type { Reset, TablePolicy } from '../../coders/contract.ts';
import type { SplitRule } from '../../corpus/decide-split.ts';
import { InputError } from '../../errors/errors.ts';
import { describeSplit, loadCorpusData } from '../../harness/load-corpus-data.ts';
import { fitsMemory } from '../../harness/memory-budget.ts';
import type { RunProgress } from '../../harness/pause.ts';
import { runAll } from '../../harness/run-all.ts';
import { isQuick, runWith } from '../../harness/run-with.ts';
import {
  boundedRequest,
  openStreamed,
  USUAL_STREAMED_CANDIDATES,
} from '../../harness/stream-request.ts';
import { runStreamed } from '../../harness/stream-run.ts';
import { tryScreen } from '../../report/try-screen.ts';
import { CommandEnd, exitCodes } from '../exit.ts';
import { whileInterruptible } from '../interrupt.ts';
import { addMemoryOptions, type MemoryOptions } from '../memory-options.ts';
import { terminalColumns } from '../output.ts';
import { addOutputOptions, type OutputOptions, writeResult } from '../output-options.ts';
import { ProgressLine } from '../progress.ts';
import {
  addSourceOptions,
  numberOption,
  type SourceOptions,
  specFromOptions,
  typedOptions,
} from '../source-options.ts';

interface TryOptions extends SourceOptions, OutputOptions, MemoryOptions {
  readonly coder: readonly string[];
  readonly tables: readonly TablePolicy[];
  readonly reset: readonly Reset[];
  readonly align: number;
}

/** What is tried when no coder is named: fixed width, the plain families, and general-purpose coders for scale. */
const USUAL_CANDIDATES = [
  'fixed',
  'huffman',
  'block-huffman:n=2',
  'arith:order=0..3',
  'deflate',
  'deflate-huffman',
  'brotli',
];

const HALVES: SplitRule = { by: 'message', order: 'in_time', train: 0.5 };

const collect = (value: string, before: string[]): string[] => [...before, value];

const isFill = (options: TryOptions) => /^\s*fill\b/.test(options.messages);

function policiesFor(options: TryOptions): readonly TablePolicy[] {
  if (options.tables.length > 0) return options.tables;
  if (options.messages === 'whole') return ['sent', 'learned'];
  // Tables that are sent anew in each packet would be tried at every length of it.
  if (isFill(options)) return ['shipped', 'learned'];
  return ['shipped', 'sent', 'learned'];
}

async function tryFiles(files: readonly string[], options: TryOptions): Promise<void> {
  const policies = policiesFor(options);
  const trains = policies.includes('shipped') || policies.includes('primed');
  if (trains && options.messages === 'whole' && files.length < 2) {
    throw new InputError('tables cannot be trained on one message', {
      expected: 'messages to train on and others to code',
      got: '--messages whole and one file',
      advice:
        'Cut the file into messages, as in --messages lines or --messages every=1024, or leave out --tables.',
    });
  }
  const candidates = (options.coder.length > 0 ? options.coder : USUAL_CANDIDATES).flatMap(
    parseCandidates,
  );
  const rule: SplitRule | undefined = trains
    ? { ...HALVES, by: isFill(options) ? 'unit' : 'message' }
    : undefined;
  const name = files.length === 1 ? basename(files[0]).replace(/[^A-Za-z0-9._-]/g, '_') : 'files';
  const spec = specFromOptions(name, files, options);
  const asked = {
    title: files.join(', '),
    candidates,
    policies,
    resets: options.reset.length > 0 ? options.reset : (['message'] as const),
    align: options.align,
    split: describeSplit(rule),
  };
  const folder = process.cwd();
  const { memory } = options;
  const inPieces = memory !== undefined && !(await fitsMemory(spec, folder, memory));
  const progress = new ProgressLine(true);
  const result = await whileInterruptible(async (interrupted) => {
    const hooks = { progress: (state: RunProgress) => progress.show(state), interrupted };
    if (!inPieces) {
      const request = { ...asked, corpora: [await loadCorpusData(spec, folder, rule)] };
      if (isQuick(request)) return runAll(request, hooks);
      return runWith(request, hooks, { cache: false });
    }
    const corpora = await openStreamed([spec], folder, rule, memory);
    return runStreamed(
      boundedRequest({
        ...asked,
        corpora,
        candidates:
          options.coder.length > 0
            ? candidates
            : USUAL_STREAMED_CANDIDATES.flatMap((text) => parseCandidates(text)),
        memoryBytes: memory,
      }),
      hooks,
    );
  }).finally(() => progress.stop());
  const { record } = result;
  const isOneMessage = record.corpora[0].message_count === 1;
  await writeResult(record, options, () =>
    tryScreen(record, {
      columns: terminalColumns(),
      caution: isOneMessage
        ? 'These rates hold for ONE long message. If the product sends packets, ask again with its messages.'
        : 'No speed was measured here, and one split of one corpus can mislead.',
      next: nextCommand(files, options, isOneMessage, inPieces),
    }),
  );
  if (record.partial) throw new CommandEnd(exitCodes.interrupted);
  if (record.cells.some((cell) => !cell.verified)) throw new CommandEnd(exitCodes.cellFailed);
}

function nextCommand(
  files: readonly string[],
  options: TryOptions,
  whole: boolean,
  inPieces: boolean,
): string {
  const names = files.map((file) => (/[^\w./-]/.test(file) ? `'${file}'` : file)).join(' ');
  if (whole) {
    const { record } = options;
    const packets = record === undefined ? 'every=192' : `fill=192,unit=${record}`;
    // Filled messages, and millions of them, are not read in pieces.
    const messages = inPieces ? 'every=4096' : packets;
    return `bitassay try ${names}${typedOptions(options, messages)}`;
  }
  return `bitassay entropy ${names}${typedOptions(options)}`;
}

/** `bitassay try FILE…`: first contact, without a plan. */
export function registerTry(program: Command): void {
  const command = program
    .command('try')
    .summary('first contact: code files with a list of coders')
    .description(
      'Codes files with a list of coders, decodes and compares each, and shows how far each lies above the entropy floor and where its bits went.',
    )
    .argument('<file...>', 'files or patterns');
  addSourceOptions(command)
    .option(
      '--coder <candidate>',
      'a candidate such as arith:order=0..3; may be repeated',
      collect,
      [],
    )
    .addOption(
      new Option('--tables <policy...>', 'where a coder’s knowledge comes from')
        .choices(['shipped', 'sent', 'learned', 'primed'])
        .default([], 'sent, learned; with messages also shipped; with fill shipped, learned'),
    )
    .addOption(
      new Option('--reset <when...>', 'when an adaptive coder forgets')
        .choices(['message', 'file', 'never'])
        .default([], 'message'),
    )
    .option(
      '--align <bits>',
      'pad each message to a multiple of so many bits',
      numberOption(1, true),
      8,
    );
  addMemoryOptions(command);
  addOutputOptions(command)
    .addHelpText(
      'after',
      `
Examples:
  bitassay try telemetry.bin
  bitassay try events.log --messages lines
  bitassay try uplink.bin --record 24 --messages records=8 --coder huffman --coder arith:order=0..3
  bitassay try uplink.bin --messages fill=192,unit=24
  bitassay try positions.csv --symbols csv:speed_knots --step 0.1
  bitassay try year.bin --memory 512MB
  bitassay try year.bin --sample every=12,block=1MB
  bitassay try *.log --json -o first-look.json`,
    )
    .action((files: string[], options: TryOptions) => tryFiles(files, options));
}
