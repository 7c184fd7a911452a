import type { z } from 'zod';
import { InputError, NotYetError } from '../errors/errors.ts';
import { nearestWord } from '../errors/nearest.ts';
import { checkFieldMap } from '../symbols/field-choice.ts';
import {
  checkFieldsApart,
  parseRecordField,
  type RecordField,
  type RecordShape,
} from '../symbols/record.ts';
import { parseSymbolTaker } from '../symbols/takers/registry.ts';
import type { CorpusSpec } from './corpus.ts';
import { checkIntake } from './intake.ts';
import { parseMessageRule } from './messages.ts';
import type { PlanDocument } from './plan-document.ts';
import { type Fault, gotText, keyText } from './plan-faults.ts';
import { corpusSchema, knownKeysAt, type PlanFile } from './plan-schema.ts';
import type { SampleRule } from './sample-rule.ts';

type Path = readonly PropertyKey[];

/** The faults behind the schema's issues, in our words. */
export function schemaFaults(issues: readonly z.core.$ZodIssue[], document: PlanDocument): Fault[] {
  return issues.flatMap((issue) =>
    issue.code === 'unrecognized_keys'
      ? issue.keys.map((key) => unknownKey(document, issue.path, key))
      : [valueFault(document, issue)],
  );
}

function unknownKey(document: PlanDocument, path: Path, key: string): Fault {
  const known = knownKeysAt(path);
  const near = nearestWord(key, known);
  return {
    line: document.lineOf([...path, key]),
    key: keyText([...path, key]),
    problem: 'no such key',
    expected: `one of ${known.join(', ')}`,
    ...(near === undefined ? {} : { advice: `Did you mean ${near}?` }),
  };
}

function valueFault(document: PlanDocument, issue: z.core.$ZodIssue): Fault {
  const { path } = issue;
  const place = {
    line: document.lineOf(path),
    ...(path.length === 0 ? {} : { key: keyText(path) }),
  };
  if (issue.code === 'invalid_key') {
    const expected = issue.issues[0]?.message ?? issue.message;
    return { ...place, problem: 'not allowed as a name', expected, got: gotText(path.at(-1)) };
  }
  if (path.length > 0 && !document.has(path))
    return { ...place, problem: 'the key is missing', expected: issue.message };
  const value = valueAt(document.data, path);
  const words = issue.code === 'invalid_value' ? issue.values.map(String) : [];
  const near = typeof value === 'string' ? nearestWord(value, words) : undefined;
  return {
    ...place,
    problem: 'not allowed',
    expected: issue.message,
    got: value === null ? 'nothing' : gotText(value),
    ...(near === undefined ? {} : { advice: `Did you mean ${near}?` }),
  };
}

function valueAt(data: unknown, path: Path): unknown {
  let value = data;
  for (const key of path) {
    if (typeof value !== 'object' || value === null) return undefined;
    value = Reflect.get(value, key);
  }
  return value;
}

/** Runs `read`; what it refuses becomes a fault at `path`, or at the key beside it that the refusal names. */
function collect<T>(
  document: PlanDocument,
  faults: Fault[],
  path: Path,
  read: () => T,
): T | undefined {
  try {
    return read();
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    const { expected, got, advice, key } = error.where;
    const parent = path.slice(0, -1);
    const beside = key === undefined ? path : [...parent, key];
    const at = document.has(beside) ? beside : parent;
    faults.push({
      line: document.lineOf(at),
      key: keyText(at),
      problem: error.message,
      ...(expected === undefined ? {} : { expected }),
      ...(got === undefined ? {} : { got }),
      ...(advice === undefined ? {} : { advice }),
      notYet: error instanceof NotYetError,
    });
    return undefined;
  }
}

/**
 * The corpora of a plan whose keys are of the right type, and what is wrong with them beyond that. Corpora that the schema
 * refuses are left out without a word: their faults come from {@link schemaFaults}.
 */
export function readCorpusSpecs(
  document: PlanDocument,
  sample?: SampleRule,
): { specs: CorpusSpec[]; faults: Fault[] } {
  const specs: CorpusSpec[] = [];
  const faults: Fault[] = [];
  const corpora = valueAt(document.data, ['corpora']);
  if (typeof corpora !== 'object' || corpora === null) return { specs, faults };
  for (const [name, data] of Object.entries(corpora)) {
    const checked = corpusSchema.safeParse(data);
    if (checked.success) {
      const base = sample === undefined ? {} : { sample };
      specs.push(readCorpusSpec(name, checked.data, document, faults, base));
    }
  }
  return { specs, faults };
}

function readCorpusSpec(
  name: string,
  written: PlanFile['corpora'][string],
  document: PlanDocument,
  faults: Fault[],
  base: Pick<CorpusSpec, 'sample'>,
): CorpusSpec {
  const path = ['corpora', name];
  const before = faults.length;
  const record = readRecord(written.record, document, faults, [...path, 'record']);
  const spec: CorpusSpec = {
    ...base,
    name,
    files: typeof written.files === 'string' ? [written.files] : written.files,
    symbols: written.symbols,
    messages: written.messages,
    ...(record === undefined ? {} : { record }),
    ...(written.lengths === undefined ? {} : { lengths: written.lengths }),
    ...(written.alphabet === undefined ? {} : { alphabet: written.alphabet }),
    ...(written.step === undefined ? {} : { step: written.step }),
    ...(written.fields === undefined ? {} : { fields: written.fields }),
  };
  const symbolsPath = [...path, 'symbols'];
  collect(document, faults, symbolsPath, () => parseSymbolTaker(spec.symbols));
  collect(document, faults, [...path, 'messages'], () => parseMessageRule(spec.messages));
  for (const name of Object.keys(written.fields ?? {})) {
    collect(document, faults, [...path, 'fields', name], () =>
      checkFieldMap(record, { [name]: written.fields![name] }),
    );
  }
  // Only sound parts can be held against each other.
  if (faults.length === before) collect(document, faults, symbolsPath, () => checkIntake(spec));
  return spec;
}

function readRecord(
  written: PlanFile['corpora'][string]['record'],
  document: PlanDocument,
  faults: Fault[],
  path: Path,
): RecordShape | undefined {
  if (written === undefined) return undefined;
  const fields: RecordField[] = [];
  for (const [name, text] of Object.entries(written.fields ?? {})) {
    const field = collect(document, faults, [...path, 'fields', name], () =>
      parseRecordField(name, text, written.bytes),
    );
    if (field !== undefined) fields.push(field);
  }
  collect(document, faults, [...path, 'fields'], () => checkFieldsApart(fields));
  return { bytes: written.bytes, fields };
}

/** Rules over several keys, beside those of a corpus; keys of the wrong type are left to {@link schemaFaults}. */
export function togetherFaults(document: PlanDocument): Fault[] {
  const faults: Fault[] = [];
  const order = valueAt(document.data, ['split', 'order']);
  const seed = ['split', 'seed'];
  if (document.has(seed) && order !== 'random') {
    faults.push({
      line: document.lineOf(seed),
      key: keyText(seed),
      problem: 'a seed changes nothing here',
      expected: 'order: random beside it',
      got: order === undefined ? 'no order' : `order: ${gotText(order)}`,
    });
  }
  const by = ['split', 'by'];
  if (valueAt(document.data, by) === 'unit') {
    const corpora = valueAt(document.data, ['corpora']);
    const all = typeof corpora === 'object' && corpora !== null ? Object.entries(corpora) : [];
    const other = all.find(([, data]) => !/^\s*fill\b/.test(String(data?.messages)));
    if (other !== undefined) {
      faults.push({
        line: document.lineOf(by),
        key: keyText(by),
        problem: `the corpus ${other[0]} has no units`,
        expected: 'messages: fill=BYTES,unit=N|line|row in every corpus',
        got: `messages: ${gotText(other[1]?.messages)}`,
        advice: 'Use by: message, which means units where messages are filled.',
      });
    }
  }
  faults.push(...randomSplitFaults(document));
  for (const key of ['candidates', 'tables', 'reset']) {
    const items = valueAt(document.data, [key]);
    if (!Array.isArray(items)) continue;
    items.forEach((item: unknown, i) => {
      if (items.indexOf(item) === i) return;
      const path = [key, i];
      faults.push({
        line: document.lineOf(path),
        key: keyText(path),
        problem: 'listed twice',
        got: gotText(item),
      });
    });
  }
  return faults;
}

/**
 * A random split leaves gaps between the messages of the test part. A coder that runs on over message ends would go from
 * one to another that never followed it, and its rate would be that of no product. Nothing is split where no table trains.
 */
function randomSplitFaults(document: PlanDocument): Fault[] {
  const tables = valueAt(document.data, ['tables']);
  const resets = valueAt(document.data, ['reset']);
  if (valueAt(document.data, ['split', 'order']) !== 'random' || !Array.isArray(resets)) return [];
  if (Array.isArray(tables) && !tables.includes('shipped') && !tables.includes('primed')) return [];
  const byFile = valueAt(document.data, ['split', 'by']) === 'file';
  const over = resets.filter((reset) => reset !== 'message' && !(byFile && reset === 'file'));
  if (over.length === 0) return [];
  const order = ['split', 'order'];
  return [
    {
      line: document.lineOf(order),
      key: keyText(order),
      problem:
        'messages dealt at random do not follow one another, so no coder can run on from one to the next',
      expected: byFile ? 'reset: [message, file] beside it' : 'reset: [message] beside it',
      got: `reset: [${over.map(String).join(', ')}]`,
      advice: 'Use order: in_time, where the test part is one stretch; split.folds gives several.',
    },
  ];
}
