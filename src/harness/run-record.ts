import { z } from 'zod';
import { ACCOUNT_LINES } from '../account/bit-account.ts';
import { entropySchema } from './entropy-schema.ts';

/**
 * The run record: what a run leaves, `DIR/run.json`. Counts, hashes and figures only, never content of the data.
 * Keys are in snake_case here and in the file; its JSON Schema is made from this ({@link runRecordJsonSchema}).
 */

const speed = z.strictObject({
  seconds: z.array(z.number()).describe('one pass over the test part, seconds, in time order'),
  speed: z.number().describe('median of pacer time ÷ candidate time'),
  low: z.number(),
  high: z.number(),
});

const account = z.strictObject(
  Object.fromEntries(ACCOUNT_LINES.map((line) => [line, z.number().optional()])) as Record<
    (typeof ACCOUNT_LINES)[number],
    z.ZodOptional<z.ZodNumber>
  >,
);

const operation = z.strictObject({
  total: z.number().describe('over all symbols, exact'),
  mean: z.number().describe('for each symbol'),
  worst: z.number().describe('most of one symbol'),
});

const deviceEnd = z
  .strictObject({
    flash_bytes: z.number().optional().describe('tables'),
    ram_bytes: z.number().optional().describe('state, own buffers, stack (an estimate)'),
    code_bytes: z.number().optional().describe('an estimate'),
    operations: z
      .strictObject({
        multiplies: operation,
        divides: operation,
        table_reads: operation,
        branches: operation,
      })
      .optional(),
  })
  .describe('what this end would take on a device, as far as the coder tells');

const cell = z.strictObject({
  id: z.string(),
  corpus: z.string(),
  candidate: z.string(),
  coder: z.string(),
  params: z.record(z.string(), z.union([z.number(), z.string()])),
  tables: z.string(),
  reset: z.string(),
  reference: z.boolean(),
  loss: z
    .strictObject({
      share: z.number(),
      per_lost_message: z.number(),
      units_per_lost_message: z
        .number()
        .optional()
        .describe('where messages are filled with units'),
    })
    .optional()
    .describe(
      'messages that cannot be decoded at the loss rate of the plan, and for each one lost',
    ),
  decodes_alone: z.boolean().describe('false: needs all earlier messages'),
  messages_as: z.string(),
  verified: z.boolean(),
  symbol_count: z.number().optional(),
  message_count: z.number().optional(),
  coded_bytes: z.number().optional(),
  carried_bits: z.number().optional(),
  rate: z.number().optional().describe('carried bits per source symbol'),
  backend: z.literal('ts').optional(),
  account: account.optional(),
  message_bytes: z
    .strictObject({
      mean: z.number(),
      mean_low: z
        .number()
        .optional()
        .describe(
          '95 % BCa interval of the mean over messages as if independent; absent for few or very many',
        ),
      mean_high: z.number().optional(),
      p50: z.number(),
      p95: z.number(),
      p99: z.number(),
      max: z.number(),
    })
    .optional(),
  units_per_message: z
    .strictObject({
      mean: z.number(),
      min: z.number().describe('without the last message of the corpus, which may be short'),
    })
    .optional()
    .describe('where messages are filled with units'),
  unit_count: z.number().optional().describe('where messages are filled with units'),
  billing: z
    .strictObject({
      step_bytes: z.number(),
      steps: z.number().describe('each message rounded up to whole steps'),
      steps_per_unit: z
        .number()
        .describe('for each message of the source, or unit where messages are filled'),
      unused_share: z.number().describe('of the billed bytes'),
    })
    .optional()
    .describe('what a link charges for that bills in steps, where the plan asks'),
  rate_without_repeats: z
    .number()
    .optional()
    .describe('rate over test messages that do not occur in train'),
  files: z
    .array(
      z.strictObject({ sha256: z.string(), symbol_count: z.number(), coded_bytes: z.number() }),
    )
    .optional(),
  fields: z
    .array(
      z.strictObject({
        name: z.string(),
        bits: z.number().describe('ideal bits of the field over all records that are coded'),
        choice: z.string().describe('transform, or transform/context'),
      }),
    )
    .optional()
    .describe('by coders that code a record by its fields'),
  encoder: deviceEnd.optional(),
  decoder: deviceEnd.optional(),
  decode_delay_bytes: z
    .number()
    .optional()
    .describe('coded bytes that a decoder holds before its first symbol, on average'),
  holds_whole_message: z
    .literal(true)
    .optional()
    .describe('the decoder gives no symbol before it has the whole message'),
  encode: speed.optional(),
  decode: speed.optional(),
  failure: z.string().optional(),
});

const corpus = z.strictObject({
  name: z.string(),
  sha256: z.string(),
  symbols_as: z.string(),
  messages_as: z.string(),
  lengths: z.string(),
  alphabet_size: z.number(),
  record_bytes: z.number().optional().describe('where the symbols are the bytes of fixed records'),
  source_bytes: z.number(),
  symbol_count: z.number().describe('of the part that is coded'),
  message_count: z
    .number()
    .describe('where messages are filled, units: each candidate cuts messages of its own'),
  unit_count: z.number().optional().describe('where messages are filled with units'),
  fill_bytes: z.number().optional().describe('the most coded bytes of a filled message'),
  train_symbol_count: z.number(),
  repeated_share: z.number().optional().describe('share of test messages that also occur in train'),
});

const ageing = z
  .strictObject({
    corpus: z.string(),
    cell: z.string(),
    segments: z.array(
      z.strictObject({
        distance: z.number().describe('symbols from the end of the train part'),
        symbol_count: z.number(),
        rate: z.number().describe('ideal bits per symbol with the shipped tables'),
        retrained_rate: z.number().describe('the same, trained on all before the segment'),
      }),
    ),
    table_bits: z.number().optional(),
    pays_after: z.number().optional().describe('symbols by which sending new tables has paid'),
  })
  .describe('how the tables of the best shipped cell age');

export const runRecordSchema = z.strictObject({
  record: z.literal(1),
  tool: z.strictObject({ name: z.literal('bitassay'), version: z.string() }),
  plan: z.strictObject({
    title: z.string(),
    align: z.number(),
    split: z.string().describe('how train and test were parted, or "none"'),
    tables: z.array(z.string()),
    resets: z.array(z.string()),
    loss_rate: z.number().optional(),
    bill_step_bytes: z.number().optional(),
    product: z
      .strictObject({ device: z.enum(['encoder', 'decoder']) })
      .optional()
      .describe('which end is the small one'),
  }),
  environment: z.strictObject({
    node: z.string(),
    zlib: z.string(),
    cpu: z.string(),
    cores: z.number(),
    os: z.string(),
    class: z.string().describe('speeds are compared only within one class'),
  }),
  corpora: z.array(corpus),
  entropy: z.array(entropySchema),
  cells: z.array(cell),
  ageing: z.array(ageing).optional(),
  undeclared: z
    .number()
    .describe('combinations that gave no cell since the coder does not declare them'),
  not_filled: z
    .number()
    .optional()
    .describe('combinations that gave no cell since their messages do not decode alone'),
  partial: z.boolean(),
});

export type RunRecord = z.infer<typeof runRecordSchema>;
export type CellRecord = RunRecord['cells'][number];
export type CorpusRecord = RunRecord['corpora'][number];
export type EntropyRecord = RunRecord['entropy'][number];

/** The published JSON Schema of the run record. */
export function runRecordJsonSchema(): unknown {
  return z.toJSONSchema(runRecordSchema);
}
