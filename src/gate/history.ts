import { createHash } from 'node:crypto';
import { appendFile, readFile } from 'node:fs/promises';
import { z } from 'zod';
import { InputError } from '../errors/errors.ts';
import { explainFileError } from '../errors/fs-faults.ts';
import type { RunRecord } from '../harness/run-record.ts';
import { type Allow, allowOf } from './allow.ts';
import { baselineOf, sorted } from './baseline.ts';
import { schemaError } from './baseline-file.ts';

const growth = z.union([z.number().min(0), z.string().regex(/^\d+(\.\d+)?%$/)]);
const speed = z.tuple([z.number(), z.number(), z.number()]).describe('speed, low, high');

/** One line of `bitassay.history.jsonl`: what a run that was adopted came to. */
export const adoptedRunSchema = z.strictObject({
  history: z.literal(1),
  time: z.iso.datetime().describe('of the adoption'),
  tool: z.string(),
  title: z.string(),
  class: z.string().describe('of the machine'),
  allow: z.strictObject({ total: growth, each_file: growth }),
  reason: z.string().optional().describe('given for bits above what is allowed'),
  corpora: z
    .record(z.string(), z.string())
    .describe('hash of the files and of all that says how they are coded'),
  cells: z.record(
    z.string(),
    z.strictObject({
      corpus: z.string(),
      bits: z.number().int().min(0),
      symbols: z.number().int().min(0),
      encode: speed.optional(),
      decode: speed.optional(),
    }),
  ),
});

export type AdoptedRun = z.infer<typeof adoptedRunSchema>;

/**
 * What history keeps of a run: its verified cells, references apart.
 * @param time    of the adoption
 * @param reason  why more bits are taken than allowed, if so
 */
export function adoptedRunOf(
  record: RunRecord,
  time: Date,
  { allow = allowOf(record.plan.gate), reason }: { allow?: Allow; reason?: string } = {},
): AdoptedRun {
  const { tool, corpora, plan, cells } = baselineOf(record);
  const cellEntries = Object.entries(cells).flatMap(([id, cell]) => {
    const { corpus, carried_bits: bits, symbol_count: symbols, encode, decode } = cell;
    if (!cell.verified || cell.reference || bits === undefined || symbols === undefined) return [];
    const figures = {
      corpus,
      bits,
      symbols,
      ...(encode === undefined ? {} : { encode: speedOf(encode) }),
      ...(decode === undefined ? {} : { decode: speedOf(decode) }),
    };
    return [[id, figures] as const];
  });
  const keyOf = (corpus: (typeof corpora)[string]): string =>
    createHash('sha256')
      .update(JSON.stringify([corpus, plan.split, record.plan.align]))
      .digest('hex')
      .slice(0, 16);
  return {
    history: 1,
    time: time.toISOString(),
    tool: tool.version,
    title: plan.title,
    class: record.environment.class,
    allow,
    ...(reason === undefined ? {} : { reason }),
    corpora: Object.fromEntries(
      sorted(Object.entries(corpora)).map(([name, corpus]) => [name, keyOf(corpus)]),
    ),
    cells: Object.fromEntries(cellEntries),
  };
}

function speedOf({ speed, low, high }: { speed: number; low: number; high: number }) {
  return [speed, low, high] satisfies [number, number, number];
}

const ADVICE = 'Take it from version control again: lines are only ever added to it.';

/**
 * Reads the text of a history, the earliest run first.
 * @param file  named in errors
 * @throws InputError with the line
 */
export function parseHistory(text: string, file: string): AdoptedRun[] {
  const lines = text.split('\n');
  return lines.flatMap((one, i): AdoptedRun[] => {
    if (one.trim() === '') return [];
    const line = i + 1;
    let json: unknown;
    try {
      json = JSON.parse(one);
    } catch (error) {
      throw new InputError(`${file}: a line of the history is not JSON`, {
        file,
        line,
        got: /^(<{7}|={7}|>{7})/.test(one) ? 'marks of a merge conflict' : (error as Error).message,
        advice: ADVICE,
      });
    }
    const parsed = adoptedRunSchema.safeParse(json);
    if (parsed.success) return [parsed.data];
    const [issue] = parsed.error.issues;
    throw schemaError('a line of the history is no adopted run', file, line, issue, ADVICE);
  });
}

/** The runs of a history file; none where there is no such file. */
export async function readHistory(file: string): Promise<AdoptedRun[]> {
  try {
    return parseHistory(await readFile(file, 'utf8'), file);
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'ENOENT') return [];
    throw explainFileError(error, file);
  }
}

/** Adds a run to a history file; what is there stays as it is. */
export async function appendHistory(file: string, run: AdoptedRun): Promise<void> {
  try {
    await appendFile(file, `${JSON.stringify(run)}\n`);
  } catch (error) {
    throw explainFileError(error, file);
  }
}
