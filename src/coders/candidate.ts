import { InputError } from '../errors/errors.ts';
import { nearestWord } from '../errors/nearest.ts';
import { parseTransformChain } from '../transforms/chain.ts';
import type { Coder, CoderEntry, Declaration } from './contract.ts';
import { filling } from './fill.ts';
import { type ParameterValues, resolveParameters, writeParameters } from './parameters.ts';
import { coderEntries } from './registry.ts';
import { stored } from './stored.ts';
import { MOST_TABLES, tableSet } from './table-set.ts';
import { transformed } from './transformed.ts';

/** A coder with all parameters set, and its stable name. */
export interface Candidate {
  /**
   * `name` or `name:key=value,…`, parameters in declared order, defaults left out; then `tables_in_set=`, `stored=on` and, last,
   * `after=`.
   */
  readonly id: string;
  /** Of this very coder: its parameters can narrow what the registry's entry declares. */
  readonly declaration: Declaration;
  /** The coder's parameters, and the keys that every coder takes where they are given. */
  readonly values: ParameterValues;
  create(): Coder;
}

/** Keys that every coder takes besides its own: several shipped tables, raw messages where shorter, steps before it. */
const COMMON_KEYS = ['tables_in_set', 'stored', 'after'];

/** Names of keys that a later version will understand, for every coder. */
const LATER_KEYS = ['stage', 'lanes', 'refresh'];

/** The registry entry of that name. Throws InputError with the nearest name. */
export function coderEntryOf(
  name: string,
  entries: readonly CoderEntry[] = coderEntries,
): CoderEntry {
  const entry = entries.find((e) => e.declaration.name === name);
  if (entry !== undefined) return entry;
  const names = entries.map((e) => e.declaration.name);
  const near = nearestWord(name, names);
  throw new InputError(`there is no coder named ${JSON.stringify(name)}`, {
    expected: `one of ${names.join(', ')}`,
    advice: near === undefined ? 'bitassay coders lists them.' : `Did you mean ${near}?`,
  });
}

/** The parameter that is given by this word alone. */
function bareParameterOf(declaration: Declaration, word: string): string | undefined {
  return declaration.parameters.find(
    (p) => p.kind === 'word' && p.bare === true && p.words.includes(word),
  )?.key;
}

function splitPairs(text: string, declaration: Declaration, pairs: string): [string, string][] {
  const { name } = declaration;
  const result: [string, string][] = [];
  for (const written of pairs.split(',')) {
    const bareKey = bareParameterOf(declaration, written.trim());
    const pair = bareKey === undefined ? written : `${bareKey}=${written}`;
    const at = pair.indexOf('=');
    const key = at < 0 ? pair.trim() : pair.slice(0, at).trim();
    if (at < 1 || key === '') {
      throw new InputError(`cannot read the candidate ${JSON.stringify(text)}`, {
        expected: 'name:key=value,key=value',
        got: pair,
        advice: `bitassay coders ${name} shows the parameters of ${name}.`,
      });
    }
    if (result.some(([k]) => k === key)) {
      throw new InputError(`the candidate ${JSON.stringify(text)} gives ${key} twice`, { key });
    }
    result.push([key, pair.slice(at + 1).trim()]);
  }
  return result;
}

/** Number of candidates that {@link parseCandidates} would give, without making them. */
export function countCandidates(text: string): number {
  let count = 1;
  for (const match of text.matchAll(/=\s*(\d+)\.\.(\d+)/g)) {
    count *= Math.max(0, Number(match[2]) - Number(match[1]) + 1);
  }
  return count;
}

/**
 * The candidates behind one text: a value may be a range `a..b`, which gives one candidate for each integer.
 * @throws InputError for an unknown coder or parameter, a value out of range, an empty range, or more than 100 000 candidates
 */
export function parseCandidates(text: string): Candidate[] {
  return candidatesAmong(text, coderEntries);
}

function candidatesAmong(text: string, entries: readonly CoderEntry[]): Candidate[] {
  const colon = text.indexOf(':');
  const name = (colon < 0 ? text : text.slice(0, colon)).trim();
  const entry = coderEntryOf(name, entries);
  const declaration = entry.declaration;
  const pairs = colon < 0 ? [] : splitPairs(text, declaration, text.slice(colon + 1));
  if (countCandidates(text) > 100_000) {
    throw new InputError(
      `the candidate ${JSON.stringify(text)} stands for ${countCandidates(text)} candidates`,
      {
        expected: 'at most 100000',
        advice: 'Narrow its ranges.',
      },
    );
  }
  let choices: Record<string, string>[] = [{}];
  for (const [key, value] of pairs) {
    if (LATER_KEYS.includes(key) && !declaration.parameters.some((p) => p.key === key)) {
      throw new InputError(`${name}: the key ${key} is not built yet`, {
        key,
        advice: 'Leave it out; a later version of bitassay will understand it.',
      });
    }
    const range = /^(\d+)\.\.(\d+)$/.exec(value);
    let values = [value];
    if (range) {
      const from = Number(range[1]);
      const to = Number(range[2]);
      if (to < from) {
        throw new InputError(`${name}: the range of ${key} is empty`, {
          key,
          expected: 'a..b with a ≤ b',
          got: value,
        });
      }
      values = Array.from({ length: to - from + 1 }, (_, i) => String(from + i));
    }
    choices = choices.flatMap((choice) => values.map((v) => ({ ...choice, [key]: v })));
  }
  return choices.map((given) => candidateOf(entry, given));
}

/** The one candidate behind a text without ranges. Throws InputError when there are several. */
export function parseCandidate(text: string): Candidate {
  return parseCandidateWith(text, []);
}

/** The same, with coders besides the registry's. */
export function parseCandidateWith(text: string, more: readonly CoderEntry[]): Candidate {
  const candidates = candidatesAmong(text, [...coderEntries, ...more]);
  if (candidates.length !== 1) {
    throw new InputError(
      `${JSON.stringify(text)} stands for ${candidates.length} candidates where one is wanted`,
      {
        advice: 'Give one value instead of a range.',
      },
    );
  }
  return candidates[0];
}

/** The candidate of an entry and the texts of its keys. */
function candidateOf(entry: CoderEntry, given: Readonly<Record<string, string>>): Candidate {
  const { name, parameters } = entry.declaration;
  const { after, stored: storedText, tables_in_set: tablesText, ...own } = given;
  const values = resolveParameters(name, parameters, own, COMMON_KEYS);
  const chain = after === undefined ? undefined : parseTransformChain(after);
  const keepsRaw = storedText !== undefined && parseStored(name, storedText);
  const tableCount = tablesText === undefined ? undefined : parseTableCount(name, tablesText);
  const create = () => {
    let coder = entry.create(values);
    if (chain !== undefined) coder = transformed(coder, chain);
    if (tableCount !== undefined) coder = tableSet(coder, tableCount);
    // Outside of the steps, so that a raw message is the product's own symbols.
    return filling(keepsRaw ? stored(coder) : coder);
  };
  const common = {
    ...(tableCount === undefined ? {} : { tables_in_set: tableCount }),
    ...(keepsRaw ? { stored: 'on' } : {}),
    ...(chain === undefined ? {} : { after: chain.name }),
  };
  const pairs = [
    writeParameters(parameters, values),
    ...Object.entries(common).map(([key, value]) => `${key}=${value}`),
  ].filter((pair) => pair !== '');
  return {
    id: pairs.length === 0 ? name : `${name}:${pairs.join(',')}`,
    declaration: create().declares,
    values: { ...values, ...common },
    create,
  };
}

function parseStored(coder: string, text: string): boolean {
  if (text === 'on' || text === 'off') return text === 'on';
  throw new InputError(`${coder}: the value of stored is not allowed`, {
    coder,
    key: 'stored',
    expected: 'on | off',
    got: text,
  });
}

function parseTableCount(coder: string, text: string): number {
  const count = Number(text);
  if (/^\d+$/.test(text) && count >= 1 && count <= MOST_TABLES) return count;
  throw new InputError(`${coder}: the value of tables_in_set is not allowed`, {
    coder,
    key: 'tables_in_set',
    expected: `an integer from 1 to ${MOST_TABLES}`,
    got: text,
  });
}
