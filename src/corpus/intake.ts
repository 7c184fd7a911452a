import { createHash } from 'node:crypto';
import { InputError } from '../errors/errors.ts';
import { symbolFieldOf } from '../symbols/record.ts';
import { parseSymbolTaker } from '../symbols/takers/registry.ts';
import type { SymbolTaker, Taken, TakenValues } from '../symbols/takers/taker.ts';
import type { Corpus, CorpusFile, CorpusSpec, RawCorpus } from './corpus.ts';
import { decideSplit, type SplitRule } from './decide-split.ts';
import { type FoundFile, findFiles } from './find-files.ts';
import { fixAlphabet } from './fix-alphabet.ts';
import { joinValues, valueCount } from './join-values.ts';
import {
  everyEnds,
  type FillBudget,
  type MessageRule,
  parseMessageRule,
  segmentFile,
  usualLengths,
} from './messages.ts';
import { inputFileBytes, readInputFile } from './read-file.ts';
import { readSample } from './sample-pieces.ts';
import { type SplitCorpus, splitCorpus } from './split.ts';

/** Bounds on what is read into memory at once. */
export interface IntakeLimits {
  readonly maxBytes: number;
  readonly maxSymbols: number;
}

/** 1 GiB of files; symbols are indexed by 32-bit numbers. */
export const USUAL_INTAKE_LIMITS: IntakeLimits = { maxBytes: 2 ** 30, maxSymbols: 2 ** 32 - 1 };

/**
 * Checks that taker, messages and record of a corpus go together.
 * @throws InputError
 */
export function checkIntake(
  spec: Pick<CorpusSpec, 'record' | 'symbols' | 'messages' | 'step' | 'sample'>,
): {
  taker: SymbolTaker;
  rule: MessageRule;
} {
  const taker = parseSymbolTaker(spec.symbols);
  const rule = parseMessageRule(spec.messages);
  if (spec.sample !== undefined) checkSampled(spec, taker, rule);
  const byRows = rule.kind === 'fill' && rule.unit === 'row';
  if (byRows && !taker.takesRows) {
    throw new InputError(`messages: ${spec.messages} does not go with symbols: ${taker.text}`, {
      key: 'messages',
      expected: 'unit=N bytes or unit=line; rows are units of symbols: csv:COLUMN',
      got: spec.messages,
    });
  }
  if (taker.takesRows && !byRows && rule.kind !== 'whole' && rule.kind !== 'every') {
    throw new InputError(`messages: ${spec.messages} does not go with symbols: ${taker.text}`, {
      key: 'messages',
      expected: 'every=N, fill=BYTES,unit=row or whole, since each row is one symbol',
      got: spec.messages,
    });
  }
  checkUnit(spec, taker, rule);
  const byLines = rule.kind === 'lines' || (rule.kind === 'fill' && rule.unit === 'line');
  if (taker.field !== undefined && byLines) {
    throw new InputError(`messages: ${spec.messages} does not go with symbols: ${taker.text}`, {
      key: 'messages',
      expected: 'whole, every=N, records=K or prefix=…, since a record has no lines',
      got: spec.messages,
    });
  }
  if (spec.record === undefined && (taker.field !== undefined || rule.kind === 'records')) {
    const asker =
      taker.field === undefined ? `messages: ${spec.messages}` : `symbols: ${taker.text}`;
    throw new InputError(`${asker} needs to know the record`, {
      key: 'record',
      expected: 'record: {bytes: N, fields: {name: type@offset}} in the corpus of a plan',
      got: 'no record',
    });
  }
  if (taker.field !== undefined && spec.record !== undefined)
    symbolFieldOf(spec.record, taker.field);
  if (spec.step !== undefined && !taker.takesRows) {
    throw new InputError(`step does not go with symbols: ${taker.text}`, {
      key: 'step',
      expected: 'symbols: csv:COLUMN',
      got: `symbols: ${taker.text}`,
    });
  }
  return { taker, rule };
}

/** What blocks of a file say by themselves. */
function checkSampled(
  spec: Pick<CorpusSpec, 'messages'>,
  taker: SymbolTaker,
  rule: MessageRule,
): void {
  if (taker.takesRows) {
    throw new InputError(`a sample does not go with symbols: ${taker.text}`, {
      key: 'sample',
      expected: 'symbols that a block of the file tells by itself',
      got: `symbols: ${taker.text}, whose rows are found from the beginning of the file`,
    });
  }
  if (rule.kind === 'fill') {
    throw new InputError(`a sample does not go with messages: ${spec.messages}`, {
      key: 'sample',
      expected: 'messages that lie in one block',
      got: 'messages that are filled, which would run on over the gaps between blocks',
      advice: 'Take messages: every=N or records=K of about that size.',
    });
  }
}

/** Units of a fixed size must be whole symbols, each the same number of them. */
function checkUnit(
  spec: Pick<CorpusSpec, 'record' | 'messages'>,
  taker: SymbolTaker,
  rule: MessageRule,
): void {
  if (rule.kind !== 'fill' || typeof rule.unit !== 'number') return;
  const { unit } = rule;
  if (taker.alphabet !== 'natural') {
    throw new InputError(`messages: ${spec.messages} does not go with symbols: ${taker.text}`, {
      key: 'messages',
      expected: 'unit=line, since so many bytes are no fixed number of these symbols',
      got: spec.messages,
    });
  }
  const step =
    taker.field === undefined ? Math.ceil(1 / taker.maxSymbolsPerByte) : (spec.record?.bytes ?? 1);
  if (unit % step === 0) return;
  throw new InputError(`a unit of ${unit} bytes is not a whole number of symbols: ${taker.text}`, {
    key: 'messages',
    expected: `unit= with a multiple of ${step}`,
    got: spec.messages,
  });
}

async function guardSize(
  found: readonly FoundFile[],
  spec: CorpusSpec,
  taker: SymbolTaker,
  limits: IntakeLimits,
): Promise<void> {
  let bytes = 0;
  for (const file of found) bytes += await inputFileBytes(file.absolutePath, file.path);
  const symbols = bytes * taker.maxSymbolsPerByte;
  if (bytes <= limits.maxBytes && symbols <= limits.maxSymbols) return;
  const most = Math.min(
    limits.maxBytes,
    Math.floor(limits.maxSymbols / Math.max(taker.maxSymbolsPerByte, Number.EPSILON)),
  );
  throw new InputError(`the files of the corpus ${spec.name} are too large to hold in memory`, {
    expected: `at most ${most} bytes for symbols: ${taker.text}`,
    got: `${bytes} bytes in ${found.length} ${found.length === 1 ? 'file' : 'files'}`,
    advice:
      'Read them in pieces (--memory 512MB), take a sample (--sample every=12,block=1MB), or name fewer files.',
  });
}

/**
 * Reads the files of a corpus, each once, and takes their symbols; the alphabet is not fixed yet. Of a sample the blocks stand
 * in the place of files.
 *
 * Cost: one pass over the bytes for the hashes and one for the symbols; memory for the source and the values, and twice
 * the values for a moment where there are several files.
 * @param baseFolder  paths and patterns of the spec are relative to it
 * @throws InputError for files that are missing, unreadable, empty or too large, and for bytes that the taker or the
 *   message rule cannot read
 */
export async function loadRawCorpus(
  spec: CorpusSpec,
  baseFolder: string,
  limits: IntakeLimits = USUAL_INTAKE_LIMITS,
): Promise<RawCorpus> {
  const { taker, rule } = checkIntake(spec);
  const found = await findFiles(spec.files, baseFolder);
  if (found.length === 0) throw new InputError(`the corpus ${spec.name} names no files`);
  const sample =
    spec.sample === undefined
      ? undefined
      : await readSample(found, spec, spec.sample, { taker, rule }, limits.maxBytes);
  if (sample === undefined) await guardSize(found, spec, taker, limits);

  const whole = createHash('sha256');
  const files: CorpusFile[] = [];
  const parts: TakenValues[] = [];
  const endsOfFiles: Uint32Array[] = [];
  let sourceBytes = 0;
  for (const piece of sample?.pieces ?? found) {
    const { path } = piece;
    const bytes = 'bytes' in piece ? piece.bytes : await readInputFile(piece.absolutePath, path);
    const taken = takeFile(taker, rule, bytes, path, spec);
    whole.update(bytes);
    sourceBytes += bytes.length;
    parts.push(taken.values);
    endsOfFiles.push(taken.messageEnds);
    files.push({
      path,
      sha256: createHash('sha256').update(bytes).digest('hex'),
      byteCount: bytes.length,
      messageCount: taken.messageEnds.length,
      symbolCount: valueCount(taken.values),
    });
  }
  const values = joinValues(parts);
  if (valueCount(values) === 0) {
    throw new InputError(`the files of the corpus ${spec.name} hold no symbols`, {
      ...(files.length === 1 ? { file: files[0].path } : {}),
      expected: `at least one symbol, taken as ${taker.text}`,
      got: 'none',
    });
  }
  const joined = joinEnds(endsOfFiles, files);
  return {
    name: spec.name,
    files,
    sha256: whole.digest('hex'),
    symbolsAs: taker.text,
    messagesAs: spec.messages,
    lengths: spec.lengths ?? usualLengths(rule),
    sourceBytes,
    ...(sample === undefined ? {} : { sample: sample.facts }),
    ...(spec.record === undefined ? {} : { record: spec.record }),
    ...joined,
    ...fillOf(rule, joined.messageEnds),
    values,
    ...(spec.alphabet === undefined ? {} : { givenAlphabet: spec.alphabet }),
  };
}

function takeFile(
  taker: SymbolTaker,
  rule: MessageRule,
  bytes: Uint8Array,
  file: string,
  spec: CorpusSpec,
): Taken {
  const taken = taker.take({
    file,
    bytes,
    segments: segmentFile(rule, bytes, file, spec.record),
    ...(spec.record === undefined ? {} : { record: spec.record }),
    ...(spec.step === undefined ? {} : { step: spec.step }),
  });
  const { values } = taken;
  if (rule.kind === 'every') {
    return { values, messageEnds: everyEnds(valueCount(values), rule.count) };
  }
  if (rule.kind === 'fill' && rule.unit === 'row') {
    return { values, messageEnds: everyEnds(valueCount(values), 1) };
  }
  return taken;
}

/** What {@link CorpusFacts} says of filling; units of a fixed size all have the symbols of the first. */
function fillOf(rule: MessageRule, unitEnds: Uint32Array): { fill?: FillBudget } {
  if (rule.kind !== 'fill') return {};
  const { bytes, unit } = rule;
  return { fill: { bytes, ...(unit === 'line' ? {} : { unitSymbols: unitEnds[0] }) } };
}

function joinEnds(
  endsOfFiles: readonly Uint32Array[],
  files: readonly CorpusFile[],
): { messageEnds: Uint32Array; fileEnds: Uint32Array } {
  const fileEnds = new Uint32Array(files.length);
  let messages = 0;
  files.forEach((file, i) => {
    messages += file.messageCount;
    fileEnds[i] = messages;
  });
  const messageEnds = new Uint32Array(messages);
  let at = 0;
  let base = 0;
  endsOfFiles.forEach((ends, i) => {
    for (let j = 0; j < ends.length; j++) messageEnds[at++] = base + ends[j];
    base += files[i].symbolCount;
  });
  return { messageEnds, fileEnds };
}

/** A corpus whose data are all coded: an alphabet that is found in data is found on all of them. */
export async function loadCorpus(spec: CorpusSpec, baseFolder: string): Promise<Corpus> {
  return fixAlphabet(await loadRawCorpus(spec, baseFolder));
}

/** A corpus with its train and test parts; an alphabet that is found in data is found on the train part. */
export async function loadSplitCorpus(
  spec: CorpusSpec,
  baseFolder: string,
  rule: SplitRule,
): Promise<{ corpus: Corpus; parts: SplitCorpus }> {
  const raw = await loadRawCorpus(spec, baseFolder);
  const split = decideSplit(raw, rule);
  const corpus = fixAlphabet(raw, split);
  return { corpus, parts: splitCorpus(corpus, split) };
}
