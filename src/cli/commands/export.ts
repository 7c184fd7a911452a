import { existsSync } from 'node:fs';
import { readFile } from 'node:fs/promises';
import { dirname, join } from 'node:path';
import { type Command, Option } from 'commander';
import { type Candidate, parseCandidate } from '../../coders/candidate.ts';
import { exportableCoders, whyNotExported } from '../../coders/exported.ts';
import { choiceSchema } from '../../compare/choice.ts';
import { readPlan } from '../../corpus/plan.ts';
import { InputError } from '../../errors/errors.ts';
import { type ExportFormat, exportFiles } from '../../export/export-files.ts';
import { type ExportSubject, exportSubject } from '../../export/export-subject.ts';
import { ParityError } from '../../export/prove.ts';
import { type NamedProof, proveExport } from '../../export/prove-export.ts';
import { hasCompiler } from '../../export/run-c.ts';
import { loadCorpusData } from '../../harness/load-corpus-data.ts';
import { requestOf } from '../../harness/plan-request.ts';
import { readRunRecord } from '../../harness/run-folder.ts';
import type { CellRecord, RunRecord } from '../../harness/run-record.ts';
import { dataKeyOfCell } from '../../harness/variation.ts';
import { writeWhole } from '../../harness/write-whole.ts';
import { countText } from '../../report/figures.ts';
import { CommandEnd, exitCodes } from '../exit.ts';
import { writeStandardOutput } from '../output.ts';
import { addSourceOptions, type SourceOptions, specFromOptions } from '../source-options.ts';

interface ExportOptions extends SourceOptions {
  readonly to: ExportFormat;
  readonly output: string;
  readonly coder?: string;
  readonly from?: readonly string[];
  readonly cell?: string;
  readonly plan?: string;
  readonly name?: string;
  readonly align: string;
  readonly prove?: boolean;
  readonly cc: string;
}

/** The plan beside a run's folder, by the name that `run` gives the folder. */
function planBeside(run: string): string {
  const stem = run.replace(/[/\\]+$/, '').replace(/\.run$/, '');
  const found = [`${stem}.yaml`, `${stem}.yml`].find((file) => existsSync(file));
  if (found !== undefined) return found;
  throw new InputError('the plan of this run is not beside it', {
    file: run,
    expected: `${stem}.yaml`,
    advice: 'Give it with --plan FILE.',
  });
}

/** What was chosen from a run, where `choose` left its choice beside the record. */
async function chosenCells(run: string): Promise<string[]> {
  const file = join(run.endsWith('.json') ? dirname(run) : run, 'choice.json');
  if (!existsSync(file)) return [];
  const parsed = choiceSchema.safeParse(JSON.parse(await readFile(file, 'utf8')));
  return parsed.success ? parsed.data.corpora.flatMap(({ pick }) => pick ?? []) : [];
}

/** The cell that is meant: the one named, else the verified one of least rate that can be exported. */
function cellOf(record: RunRecord, text: string | undefined): CellRecord {
  const exportable = record.cells.filter(
    (cell) =>
      cell.verified &&
      (cell.tables === 'shipped' || cell.tables === 'none') &&
      // What the plan varies is exported only by its whole name; a fold trains on what came after its test part.
      (cell.vary === undefined || (cell.id === text && cell.vary.fold === undefined)) &&
      whyNotExported(parseCandidate(cell.candidate)) === undefined,
  );
  const named = exportable.filter((cell) => text === undefined || cell.id.includes(text));
  if (text === undefined && record.corpora.length > 1) {
    throw new InputError('the run has several corpora, and an export is for one', {
      expected: `--cell with one of ${exportable.map((cell) => cell.id).join(', ')}`,
    });
  }
  const exact = named.find((cell) => cell.id === text);
  if (exact !== undefined) return exact;
  if (text !== undefined && named.length > 1) {
    throw new InputError(`--cell ${text} names ${named.length} cells`, {
      expected: 'one cell',
      got: named.map((cell) => cell.id).join(', '),
    });
  }
  const best = named.toSorted((a, b) => (a.carried_bits ?? 0) - (b.carried_bits ?? 0))[0];
  if (best !== undefined) return best;
  const folded = record.cells.some((cell) => cell.vary?.fold !== undefined);
  const meant = record.cells.find((cell) => text !== undefined && cell.id.includes(text));
  const reason = meant && whyNotExported(parseCandidate(meant.candidate));
  if (meant !== undefined && reason !== undefined) {
    throw new InputError(`${meant.id} cannot be exported: ${reason}`, {
      expected: `a verified cell with shipped tables of ${exportableCoders.join(', ')}`,
      advice: 'Put the form that can be exported among the candidates, and run the plan again.',
    });
  }
  throw new InputError('no cell of this run can be exported', {
    ...(text === undefined ? {} : { got: `--cell ${text}` }),
    expected: `a verified cell with shipped tables of ${exportableCoders.join(', ')}`,
    ...(folded
      ? {
          advice:
            'Folds train on what came after their test part, too. Run the plan without split.folds, and export from that.',
        }
      : {}),
  });
}

async function subjectOfRun(run: string, options: ExportOptions): Promise<ExportSubject> {
  const record = await readRunRecord(run);
  const chosen = options.cell === undefined ? await chosenCells(run) : [];
  const cell = cellOf(record, options.cell ?? (chosen.length === 1 ? chosen[0] : undefined));
  const request = await requestOf(await readPlan(options.plan ?? planBeside(run)));
  const key = dataKeyOfCell(cell);
  const corpus = request.corpora.find((c) => c.key === key);
  const recorded = record.corpora.find((c) => c.name === cell.corpus);
  if (corpus === undefined || recorded === undefined || corpus.sha256 !== recorded.sha256) {
    throw new InputError(`the data of ${cell.corpus} are not those of the run`, {
      expected: `SHA-256 ${recorded?.sha256}`,
      got: corpus === undefined ? 'no such corpus in the plan' : corpus.sha256,
      advice: 'Run the plan again, or bring back the files of the run.',
    });
  }
  return exportSubject(
    parseCandidate(cell.candidate),
    corpus,
    cell.vary?.align ?? record.plan.align,
  );
}

async function subjectOfFiles(
  candidate: Candidate,
  options: ExportOptions,
): Promise<ExportSubject> {
  const { from } = options;
  if (from === undefined || from.length === 0) {
    throw new InputError('--coder needs data to train on', { advice: 'Give files with --from.' });
  }
  const corpus = await loadCorpusData(
    specFromOptions('data', from, options),
    process.cwd(),
    undefined,
  );
  const { test, sentMap, ...rest } = corpus;
  if (sentMap !== undefined) {
    throw new InputError(
      `symbols ${corpus.symbolsAs} need an alphabet map, which is not exported yet`,
      {
        advice: 'Give --alphabet, or symbols with an alphabet of their own.',
      },
    );
  }
  const none = { ...test, symbols: test.symbols.subarray(0, 0), messageEnds: new Uint32Array() };
  return exportSubject(candidate, { ...rest, train: test, test: none }, Number(options.align));
}

function sizeLines({ sizes }: NamedProof): string[] {
  if (sizes === undefined) return [];
  return (['encoder', 'decoder'] as const).map((end) => {
    const { codeBytes, tableBytes, stackBytes } = sizes[end];
    return `  ${end} here: ${countText(codeBytes)} bytes of code, ${countText(tableBytes)} of tables, at most ${countText(stackBytes)} of stack`;
  });
}

function proofLines(proofs: readonly NamedProof[]): string[] {
  return proofs.flatMap((proof) => {
    const { what, messages, symbols, damaged, refused } = proof;
    return [
      `  ${what}: ${countText(messages)} messages (${countText(symbols)} symbols) byte-identical both ways; ` +
        `${countText(damaged)} damaged ones treated alike, ${countText(refused)} of them refused`,
      ...sizeLines(proof),
    ];
  });
}

async function proofsOf(
  subject: ExportSubject,
  coder: Parameters<typeof proveExport>[1],
  options: ExportOptions,
): Promise<NamedProof[]> {
  const withC = options.to !== 'ts';
  if (withC && !hasCompiler(options.cc)) {
    throw new InputError(`there is no C compiler named ${options.cc}`, {
      advice: 'Name one with --cc, or export --to ts.',
    });
  }
  return proveExport(subject, coder, options.to === 'ts' ? ['ts'] : ['c'], options.cc);
}

async function exportCoder(run: string | undefined, options: ExportOptions): Promise<void> {
  if ((run === undefined) === (options.coder === undefined)) {
    throw new InputError('an export is made from a run, or from --coder and --from', {
      advice: 'bitassay export plan.run --to c -o tables, or --coder huffman --from FILE.',
    });
  }
  const subject =
    run === undefined
      ? await subjectOfFiles(parseCandidate(options.coder!), options)
      : await subjectOfRun(run, options);
  const name =
    options.name ??
    `${subject.corpus.name}_${subject.candidate.declaration.name}`
      .toLowerCase()
      .replace(/[^a-z0-9]+/g, '_')
      .replace(/^_+/, '');
  const { coder, provenance, files } = exportFiles(subject, options.to, name);
  let proofs: NamedProof[] = [];
  try {
    if (options.prove) proofs = await proofsOf(subject, coder, options);
  } catch (error) {
    if (!(error instanceof ParityError)) throw error;
    process.stderr.write(`bitassay: not proven, and nothing was written: ${error.message}\n`);
    throw new CommandEnd(exitCodes.answerIsNo);
  }
  for (const [file, text] of files) await writeWhole(join(options.output, file), text);
  const test =
    provenance.test_rate === undefined
      ? ''
      : `, ${provenance.test_rate.toFixed(3)} on the test part`;
  const lines = [
    `${provenance.candidate}, tables ${provenance.table_id}: ${provenance.train_rate.toFixed(3)} bits per symbol on the train part${test}`,
    ...[...files.keys()].map((file) => `  ${join(options.output, file)}`),
    ...(proofs.length === 0
      ? ['Not proven here: --prove builds it and holds it to the program’s own coder.']
      : ['Proven:', ...proofLines(proofs)]),
    'Messages do not name their tables: carry the table id beside them if tables will ever change.',
  ];
  await writeStandardOutput(`${lines.join('\n')}\n`);
}

/** `bitassay export`: trained tables with an encoder and a decoder. */
export function registerExport(program: Command): void {
  const command = program
    .command('export')
    .summary('trained tables, with encoder and decoder, as C99 or TypeScript')
    .description(
      'Trains a candidate on the train part only and writes its tables with an encoder and a decoder of one message: C99 without dynamic memory, recursion or floats, a TypeScript module, or the tables alone as JSON.',
    )
    .argument('[run]', 'folder of a run; its plan is looked for beside it')
    .addOption(new Option('--to <format>', 'format').choices(['json', 'c', 'ts']).default('c'))
    .requiredOption('-o, --output <folder>', 'folder to write into')
    .option(
      '--cell <text>',
      'the cell whose id contains this text (default: the one that choose picked, else the best that can be exported)',
    )
    .option('--plan <file>', 'the plan of the run, if it is not beside it')
    .option('--coder <candidate>', 'a candidate, in place of a run')
    .option('--from <file...>', 'with --coder: all of these files train')
    .option('--name <word>', 'prefix of the exported names')
    .option(
      '--prove',
      'build the export and hold it to the program’s own coder, message by message',
    )
    .option('--cc <compiler>', 'C compiler for --prove', 'gcc')
    .addOption(
      new Option('--align <bits>', 'with --coder: pad each message to a multiple of this')
        .choices(['8', '16', '32', '64'])
        .default('8'),
    );
  addSourceOptions(command)
    .addHelpText(
      'after',
      `
Examples:
  bitassay export plan.run --to c -o firmware/tables --cell events/huffman --prove
  bitassay export --coder huffman --from old.log --messages lines --to ts -o tables`,
    )
    .action((run: string | undefined, options: ExportOptions) => exportCoder(run, options));
}
