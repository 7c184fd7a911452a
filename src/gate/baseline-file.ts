import { readFile } from 'node:fs/promises';
import { basename, dirname, join } from 'node:path';
import type { z } from 'zod';
import { InputError } from '../errors/errors.ts';
import { explainFileError } from '../errors/fs-faults.ts';
import { type Baseline, baselineSchema } from './baseline.ts';

/** The usual name of a baseline, beside its plan. */
export const BASELINE_NAME = 'bitassay.baseline.json';

/** The history beside a baseline: `NAME.history.jsonl` for `NAME.baseline.json`. */
export function historyFileOf(baselineFile: string): string {
  const name = basename(baselineFile).replace(/(\.baseline)?\.json$/, '');
  return join(dirname(baselineFile), `${name}.history.jsonl`);
}

function isPlain(value: unknown): value is Record<string, unknown> {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}

/** One figure a line, a file's two figures and a list on one, so that a change in git shows what changed and nothing else. */
function written(value: unknown, indent: string, inline: boolean): string {
  if (Array.isArray(value)) return `[${value.map((one) => JSON.stringify(one)).join(', ')}]`;
  if (!isPlain(value)) return JSON.stringify(value);
  const entries = Object.entries(value);
  if (entries.length === 0) return '{}';
  if (inline) {
    return `{ ${entries.map(([key, one]) => `${JSON.stringify(key)}: ${JSON.stringify(one)}`).join(', ')} }`;
  }
  const deeper = `${indent} `;
  const lines = entries.map(
    ([key, one]) =>
      `${deeper}${JSON.stringify(key)}: ${written(one, deeper, isPlain(one) && 'bytes' in one && 'symbols' in one)}`,
  );
  return `{\n${lines.join(',\n')}\n${indent}}`;
}

/** A baseline as it is kept. */
export function baselineText(baseline: Baseline): string {
  return `${written(baseline, '', false)}\n`;
}

/** The line of a text on which its JSON breaks, where the engine says at which character. */
function brokenLine(text: string, message: string): number | undefined {
  const marked = text.split('\n').findIndex((line) => /^(<{7}|={7}|>{7})/.test(line));
  if (marked >= 0) return marked + 1;
  const position = /position (\d+)/.exec(message)?.[1];
  if (position !== undefined) return text.slice(0, Number(position)).split('\n').length;
  return /end of JSON/.test(message) ? text.trimEnd().split('\n').length : undefined;
}

/** The line of a key: the keys on the way to it follow one another in the text. */
function lineOfKey(text: string, path: readonly PropertyKey[]): number | undefined {
  let at = 0;
  for (const key of path) {
    if (typeof key === 'number') break;
    const found = text.indexOf(`${JSON.stringify(String(key))}:`, at);
    if (found < 0) break;
    at = found;
  }
  return at === 0 ? undefined : text.slice(0, at).split('\n').length;
}

/** What a fault of a schema says to the reader, at a place of a JSON text. */
export function schemaError(
  what: string,
  file: string,
  line: number | undefined,
  issue: z.core.$ZodIssue,
  advice: string,
): InputError {
  return new InputError(`${file}: ${what}`, {
    file,
    ...(line === undefined ? {} : { line }),
    ...(issue.path.length === 0 ? {} : { key: issue.path.map(String).join('.') }),
    got: issue.message,
    advice,
  });
}

const ADVICE = 'Take it from version control again, or adopt a run: bitassay adopt RUN';

/**
 * Reads the text of a baseline.
 * @param file  named in errors
 * @throws InputError with the line
 */
export function parseBaseline(text: string, file: string): Baseline {
  let json: unknown;
  try {
    json = JSON.parse(text);
  } catch (error) {
    const { message } = error as Error;
    const line = brokenLine(text, message);
    throw new InputError(`${file}: this is no baseline: it is not JSON`, {
      file,
      ...(line === undefined ? {} : { line }),
      got: /^(<{7}|={7}|>{7})/m.test(text) ? 'marks of a merge conflict' : message,
      advice: ADVICE,
    });
  }
  const parsed = baselineSchema.safeParse(json);
  if (parsed.success) return parsed.data;
  const [issue] = parsed.error.issues;
  throw schemaError(
    'this is no baseline that this version reads',
    file,
    lineOfKey(text, issue.path),
    issue,
    ADVICE,
  );
}

/**
 * Reads a baseline.
 * @throws as {@link parseBaseline}, and what the file system says
 */
export async function readBaseline(file: string): Promise<Baseline> {
  const baseline = await readBaselineIfAny(file);
  if (baseline !== undefined) return baseline;
  throw new InputError(`${file}: there is no baseline yet`, {
    file,
    advice: 'Adopt a run first: bitassay adopt RUN; or name another file: --baseline FILE',
  });
}

/** The same, undefined where there is no such file. */
export async function readBaselineIfAny(file: string): Promise<Baseline | undefined> {
  let text: string;
  try {
    text = await readFile(file, 'utf8');
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'ENOENT') return undefined;
    throw explainFileError(error, file);
  }
  return parseBaseline(text, file);
}
