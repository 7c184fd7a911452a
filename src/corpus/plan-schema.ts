import { z } from 'zod';
import { MAX_ALPHABET_SIZE } from '../symbols/alphabet-map.ts';
import { BYTE_SIZE } from './byte-size.ts';

/**
 * The plan file, every key that it has or will have. The text of each `error` says what is expected there and is shown
 * to the reader as it is. Keys whose feature is not built are valid here and refused by plan-later.ts.
 */

function wholeNumber(least: number, most: number) {
  const error = `a whole number from ${least} to ${most}`;
  return z.int({ error }).min(least, { error }).max(most, { error });
}

function number(least: number, most: number) {
  const error = `a number from ${least} to ${most}`;
  return z.number({ error }).min(least, { error }).max(most, { error });
}

function positive() {
  const error = 'a number above 0';
  return z.number({ error }).positive({ error });
}

function text(error: string) {
  return z.string({ error }).min(1, { error });
}

function pattern(expression: RegExp, error: string) {
  return z.string({ error }).regex(expression, { error });
}

function oneOf<const T extends readonly string[]>(...words: T) {
  return z.enum(words, { error: `${words.slice(0, -1).join(', ')} or ${words.at(-1)}` });
}

function list<T extends z.ZodType>(item: T, error: string) {
  return z.array(item, { error }).min(1, { error });
}

/** Alternatives that all fail with the same text. */
function either<const T extends readonly z.ZodType[]>(
  error: string,
  alternatives: (error: string) => T,
) {
  return z.union(alternatives(error), { error });
}

function object<T extends z.ZodRawShape>(shape: T) {
  return z.strictObject(shape, {
    // Unknown keys are told apart by the reader of the issues.
    error: (issue) => (issue.code === 'invalid_type' ? keysOf(shape) : undefined),
  });
}

function keysOf(shape: z.ZodRawShape): string {
  return `a map with the keys ${Object.keys(shape).join(', ')}`;
}

const COUNT = wholeNumber(1, 2 ** 31);
const SHARE = number(0, 1);
const TRAIN_SHARE = 'a share of the train part, above 0 and up to 1';
const ALIGNMENTS = [1, 8, 16, 32, 64] as const;
const LOSS = 'a share of messages lost, above 0 and below 1';
const CHANCE = 'a probability above 0 and below 1';
const LOSSES =
  'a probability above 0 and below 1, or good_to_bad and bad_to_good, with lost_in_bad and lost_in_good, from 0 to 1, where some messages are lost and some arrive';
const BYTES = pattern(BYTE_SIZE, 'a size such as 512MB');
const RESET = pattern(
  /^(message|file|never|message\*[1-9]\d{0,9})$/,
  'message, file, never or message*R',
);
const GROWTH = either('a number of bits, 0 or more, or a percentage such as 0.5%', (error) => [
  z.number({ error }).min(0, { error }),
  pattern(/^\d+(\.\d+)?%$/, error),
]);

const record = object({
  bytes: wholeNumber(1, 2 ** 20),
  fields: z
    .record(z.string(), text('type@offset, as in u16le@4'), {
      error: 'names of fields, each with its type@offset',
    })
    .optional(),
});

const NAME_OF_CORPUS = /^[A-Za-z0-9][A-Za-z0-9._-]*$/;

/** One corpus of a plan. */
export const corpusSchema = object({
  files: either('a path or pattern, or a list of them', (error) => [
    text(error),
    list(text('a path or pattern'), error),
  ]),
  record: record.optional(),
  symbols: text('how to take symbols, as in bytes or csv:COLUMN'),
  messages: text('how to cut messages, as in whole, lines or records=8'),
  lengths: oneOf('known', 'link', 'sent').optional(),
  alphabet: wholeNumber(1, MAX_ALPHABET_SIZE).optional(),
  step: positive().optional(),
  fields: z
    .record(z.string(), text('transform or transform/context, as in delta/last'), {
      error: 'names of fields, each with its transform, as in delta/last',
    })
    .optional(),
  weight: positive().optional(),
});

const coder = object({
  encode: text('a command line'),
  decode: text('a command line'),
  protocol: z.literal('batch', { error: 'batch' }).optional(),
});

/** What a product allows. */
export const limitsSchema = object({
  max: object({
    rate: positive().optional(),
    flash_bytes: COUNT.optional(),
    ram_bytes: COUNT.optional(),
    code_bytes: COUNT.optional(),
    cycles_per_symbol: positive().optional(),
    message_bytes_mean: positive().optional(),
    message_bytes_p50: COUNT.optional(),
    message_bytes_p95: COUNT.optional(),
    message_bytes_p99: COUNT.optional(),
    message_bytes_max: COUNT.optional(),
  }).optional(),
  min: object({
    encode_speed: positive().optional(),
    decode_speed: positive().optional(),
    units_per_message: positive().optional(),
  }).optional(),
  exports: oneOf('json', 'c', 'ts').optional(),
  reset: RESET.optional(),
});

/** What sending costs. */
export const costSchema = object({
  price_per_megabyte: positive().optional(),
  currency: text('a currency, as in EUR').optional(),
  bill_step_bytes: COUNT.optional(),
  units_per_day: positive().optional(),
  devices: COUNT.optional(),
});

function chance() {
  return z.number({ error: CHANCE }).gt(0, { error: CHANCE }).lt(1, { error: CHANCE });
}

/** Losses of a channel that is good and bad in turn: some messages must be lost and some arrive, and it must change. */
const burstLosses = object({
  good_to_bad: SHARE,
  bad_to_good: SHARE,
  lost_in_bad: SHARE.optional(),
  lost_in_good: SHARE.optional(),
}).refine(
  ({ good_to_bad: toBad, bad_to_good: toGood, lost_in_bad = 1, lost_in_good = 0 }) => {
    const lost = toBad * lost_in_bad + toGood * lost_in_good;
    return lost > 0 && lost < toBad + toGood;
  },
  { error: LOSSES },
);

/** Damage that is simulated, each kind in an experiment of its own. */
export const damageSchema = object({
  flip: chance().optional(),
  lose_bytes: chance().optional(),
  lose_messages: either(LOSSES, () => [chance(), burstLosses]).optional(),
  seed: wholeNumber(0, 2 ** 32 - 1).optional(),
}).refine(
  ({ flip, lose_bytes, lose_messages }) =>
    flip !== undefined || lose_bytes !== undefined || lose_messages !== undefined,
  { error: 'at least one of flip, lose_bytes and lose_messages' },
);

/** By how much carried bits may grow over a baseline, in all and of each file. */
export const gateSchema = object({
  allow: object({ total: GROWTH.optional(), each_file: GROWTH.optional() }),
});

/** The schema of a plan file; keys in snake_case. */
export const planSchema = object({
  plan: z.literal(1, { error: '1, the version of the plan file' }),
  title: text('a line of text').optional(),
  corpora: z
    .record(
      pattern(NAME_OF_CORPUS, 'a name of letters, digits, dots, hyphens and underscores'),
      corpusSchema,
      { error: 'names of corpora, each with its keys' },
    )
    .refine((corpora) => Object.keys(corpora).length > 0, { error: 'at least one corpus' }),
  split: object({
    by: oneOf('message', 'unit', 'file', 'block').optional(),
    order: oneOf('in_time', 'random').optional(),
    train: SHARE.optional(),
    seed: wholeNumber(0, 2 ** 32 - 1).optional(),
    folds: wholeNumber(2, 100).optional(),
  }).optional(),
  candidates: list(text('a candidate, as in huffman or arith:order=0..4'), 'a list of candidates'),
  coders: z.record(z.string(), coder, { error: 'names of coders, each with its keys' }).optional(),
  tables: list(
    oneOf('shipped', 'sent', 'learned', 'primed'),
    'a list of shipped, sent, learned, primed',
  ).optional(),
  reset: list(RESET, 'a list of message, file, never').optional(),
  align: z.literal(ALIGNMENTS, { error: '1, 8, 16, 32 or 64' }).optional(),
  check: oneOf('none', 'crc32').optional(),
  timing: object({
    repeats: wholeNumber(0, 10_000).optional(),
    pacer: text('a candidate without tables, as in deflate-huffman').optional(),
  }).optional(),
  product: object({ device: oneOf('encoder', 'decoder') }).optional(),
  limits: limitsSchema.optional(),
  cost: costSchema.optional(),
  vary: object({
    train_share: list(
      z.number({ error: TRAIN_SHARE }).gt(0, { error: TRAIN_SHARE }).max(1, { error: TRAIN_SHARE }),
      'a list of shares above 0 and up to 1',
    ).optional(),
    message_symbols: list(COUNT, 'a list of whole numbers').optional(),
    align: list(
      z.literal(ALIGNMENTS, { error: '1, 8, 16, 32 or 64' }),
      'a list of 1, 8, 16, 32, 64',
    ).optional(),
  }).optional(),
  budget: object({ cell_seconds: positive().optional(), cell_memory: BYTES.optional() }).optional(),
  sample: object({
    every: COUNT.optional(),
    reservoir: BYTES.optional(),
    block: BYTES.optional(),
    seed: wholeNumber(0, 2 ** 32 - 1).optional(),
  }).optional(),
  memory: BYTES.optional(),
  loss: object({
    rate: z.number({ error: LOSS }).gt(0, { error: LOSS }).lt(1, { error: LOSS }),
  }).optional(),
  damage: damageSchema.optional(),
  gate: gateSchema.optional(),
});

/** A plan as it stands in the file, checked against the schema. */
export type PlanFile = z.infer<typeof planSchema>;

/** The published JSON Schema of the plan file, draft 2020-12. Rules that tie keys together are not in it. */
export function planJsonSchema(): Record<string, unknown> {
  return { title: 'bitassay plan', ...z.toJSONSchema(planSchema) };
}

/** The keys known at a place of the plan, none where names are free or where no object stands. */
export function knownKeysAt(path: readonly PropertyKey[]): string[] {
  let at: z.core.$ZodType | undefined = planSchema;
  for (const key of path) {
    at = inside(at);
    if (at instanceof z.ZodObject) at = at.shape[String(key)];
    else if (at instanceof z.ZodRecord) at = at.valueType;
    else if (at instanceof z.ZodArray) at = at.element;
    else return [];
  }
  at = inside(at);
  return at instanceof z.ZodObject ? Object.keys(at.shape) : [];
}

function inside(schema: z.core.$ZodType | undefined): z.core.$ZodType | undefined {
  return schema instanceof z.ZodOptional ? schema.unwrap() : schema;
}
