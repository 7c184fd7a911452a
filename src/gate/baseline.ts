import { z } from 'zod';
import { ACCOUNT_LINES } from '../account/bit-account.ts';
import { toolVersion } from '../harness/environment.ts';
import type { CellRecord, CorpusRecord, RunRecord } from '../harness/run-record.ts';

/** What a baseline keeps of a run: what a later run is held against, and nothing else. */

const lines = Object.fromEntries(
  ACCOUNT_LINES.map((line) => [line, z.number().optional()]),
) as Record<(typeof ACCOUNT_LINES)[number], z.ZodOptional<z.ZodNumber>>;

/** Counts of each kind of operation, over all symbols and of the worst symbol. */
export const OPERATIONS = ['multiplies', 'divides', 'table_reads', 'branches'] as const;

const end = z.strictObject({
  flash_bytes: z.number().optional(),
  ram_bytes: z.number().optional(),
  code_bytes: z.number().optional(),
  multiplies: z.number().optional().describe('over all symbols, as all operations'),
  multiplies_worst: z.number().optional().describe('of one symbol'),
  divides: z.number().optional(),
  divides_worst: z.number().optional(),
  table_reads: z.number().optional(),
  table_reads_worst: z.number().optional(),
  branches: z.number().optional(),
  branches_worst: z.number().optional(),
});

const speed = z.strictObject({
  speed: z.number(),
  low: z.number().describe('95 % interval'),
  high: z.number(),
  samples: z
    .array(z.number())
    .describe('candidate time ÷ pacer time of the same turn, in time order'),
  unsteady: z.literal(true).optional(),
});

const bits = z.number().int().min(0);

const cell = z.strictObject({
  corpus: z.string().describe('key of corpora'),
  tables: z.string(),
  reset: z.string(),
  align: z.number(),
  reference: z.literal(true).optional().describe('shown, its bits are not gated'),
  verified: z.boolean(),
  symbol_count: z.number().optional(),
  message_count: z.number().optional(),
  carried_bits: bits.optional(),
  account: z.strictObject(lines).optional(),
  files: z
    .record(z.string(), z.strictObject({ symbols: z.number(), bytes: bits }))
    .optional()
    .describe('by SHA-256; the second of the same content ends in #2'),
  encoder: end.optional(),
  decoder: end.optional(),
  timed: z.strictObject({ pacer: z.string(), symbol_count: z.number() }).optional(),
  encode: speed.optional(),
  decode: speed.optional(),
});

const corpus = z.strictObject({
  sha256: z.string(),
  symbols_as: z.string(),
  messages_as: z.string(),
  lengths: z.string(),
  folds: z.number().optional(),
  sample: z.string().optional(),
});

/** `bitassay.baseline.json`: one adopted run. */
export const baselineSchema = z.strictObject({
  baseline: z.literal(1),
  tool: z.strictObject({ name: z.literal('bitassay'), version: z.string() }),
  plan: z.strictObject({ title: z.string(), split: z.string() }),
  environment: z.strictObject({
    class: z.string().describe('speeds are compared only within one class'),
    cpu: z.string(),
    node: z.string(),
    zlib: z.string(),
  }),
  corpora: z.record(z.string(), corpus),
  cells: z.record(z.string(), cell),
});

export type Baseline = z.infer<typeof baselineSchema>;
export type BaselineCell = Baseline['cells'][string];
export type BaselineEnd = NonNullable<BaselineCell['encoder']>;

/** The published JSON Schema of a baseline. */
export function baselineJsonSchema(): unknown {
  return { title: 'bitassay baseline', ...(z.toJSONSchema(baselineSchema) as object) };
}

/** By code units: the same on every machine, whatever its language. */
export function sorted<T>(entries: readonly (readonly [string, T])[]): [string, T][] {
  return entries
    .map(([key, value]): [string, T] => [key, value])
    .sort(([a], [b]) => (a < b ? -1 : Number(a > b)));
}

function corpusOf(record: CorpusRecord): Baseline['corpora'][string] {
  const { sha256, symbols_as, messages_as, lengths, folds, sample } = record;
  return {
    sha256,
    symbols_as,
    messages_as,
    lengths,
    ...(folds === undefined ? {} : { folds }),
    ...(sample === undefined
      ? {}
      : {
          sample: `${sample.blocks} of ${sample.of_blocks} blocks of ${sample.block_bytes} bytes${sample.seed === undefined ? '' : `, seed ${sample.seed}`}`,
        }),
  };
}

function endOf(device: CellRecord['encoder']): BaselineEnd | undefined {
  if (device === undefined) return undefined;
  const { flash_bytes, ram_bytes, code_bytes, operations } = device;
  const end: BaselineEnd = {
    ...(flash_bytes === undefined ? {} : { flash_bytes }),
    ...(ram_bytes === undefined ? {} : { ram_bytes }),
    ...(code_bytes === undefined ? {} : { code_bytes }),
  };
  if (operations !== undefined) {
    for (const kind of OPERATIONS) {
      end[kind] = operations[kind].total;
      end[`${kind}_worst`] = operations[kind].worst;
    }
  }
  return Object.keys(end).length === 0 ? undefined : end;
}

/** Five digits tell speeds apart that no timing does. */
const short = (value: number): number => Number(value.toPrecision(5));

function speedOf(times: CellRecord['encode']): BaselineCell['encode'] {
  if (times === undefined) return undefined;
  const { seconds, pacer_seconds, speed, low, high, unsteady } = times;
  return {
    speed: short(speed),
    low: short(low),
    high: short(high),
    samples: seconds.map((own, i) => short(own / pacer_seconds[i])),
    ...(unsteady === undefined ? {} : { unsteady }),
  };
}

function filesOf(files: CellRecord['files']): BaselineCell['files'] {
  if (files === undefined) return undefined;
  const seen = new Map<string, number>();
  const entries = files.map(({ sha256, symbol_count, coded_bytes }) => {
    const count = (seen.get(sha256) ?? 0) + 1;
    seen.set(sha256, count);
    const key = count === 1 ? sha256 : `${sha256}#${count}`;
    return [key, { symbols: symbol_count, bytes: coded_bytes }] as const;
  });
  return Object.fromEntries(sorted(entries));
}

/** Drops keys that hold nothing, so that what is written is what is read. */
function present<T extends object>(object: T): T {
  return Object.fromEntries(Object.entries(object).filter(([, value]) => value !== undefined)) as T;
}

function cellOf(cell: CellRecord, align: number): BaselineCell {
  const { vary, timed, verified, reference } = cell;
  const known = {
    corpus: cell.corpus,
    tables: cell.tables,
    reset: cell.reset,
    align: vary?.align ?? align,
    ...(reference ? { reference } : {}),
    verified,
    symbol_count: cell.symbol_count,
  };
  if (!verified || reference) return present({ ...known, carried_bits: cell.carried_bits });
  return present({
    ...known,
    message_count: cell.message_count,
    carried_bits: cell.carried_bits,
    account: cell.account === undefined ? undefined : present(cell.account),
    files: filesOf(cell.files),
    encoder: endOf(cell.encoder),
    decoder: endOf(cell.decoder),
    timed:
      timed === undefined ? undefined : { pacer: timed.pacer, symbol_count: timed.symbol_count },
    encode: speedOf(cell.encode),
    decode: speedOf(cell.decode),
  });
}

/** What a baseline keeps of a record; cells, corpora and files are sorted. */
export function baselineOf(record: RunRecord): Baseline {
  const { plan, environment } = record;
  return {
    baseline: 1,
    tool: { name: 'bitassay', version: toolVersion() },
    plan: { title: plan.title, split: plan.split },
    environment: {
      class: environment.class,
      cpu: environment.cpu,
      node: environment.node,
      zlib: environment.zlib,
    },
    corpora: Object.fromEntries(sorted(record.corpora.map((c) => [c.name, corpusOf(c)] as const))),
    cells: Object.fromEntries(
      sorted(record.cells.map((c) => [c.id, cellOf(c, plan.align)] as const)),
    ),
  };
}
