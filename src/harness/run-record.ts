import { z } from 'zod';
import { ACCOUNT_LINES } from '../account/bit-account.ts';
import { costSchema, damageSchema, gateSchema, limitsSchema } from '../corpus/plan-schema.ts';
import { cellDamageSchema } from './damage-schema.ts';
import { entropySchema } from './entropy-schema.ts';

/**
 * The run record: what a run leaves, `DIR/run.json`. Counts, hashes and figures only, never content of the data.
 * Keys are in snake_case here and in the file; its JSON Schema is made from this ({@link runRecordJsonSchema}).
 */

const pacedTime = z.strictObject({
  seconds: z.number().describe('median of the samples'),
  pacer_symbols: z.number().describe('the symbols that the pacer codes at that end in this time'),
  low: z.number().describe('of pacer_symbols: 95 % interval'),
  high: z.number(),
});

const speed = z.strictObject({
  seconds: z
    .array(z.number())
    .describe(
      'seconds of a run over the timed part, each a mean over at least 20 ms, in time order',
    ),
  pacer_seconds: z.array(z.number()).describe('the same of the pacer, in the same turns'),
  median: z.number().describe('of seconds'),
  p95: z.number().describe('of seconds'),
  speed: z.number().describe('median of pacer time ÷ candidate time'),
  low: z
    .number()
    .describe(
      '95 % interval of speed: bootstrap over turns, percentiles expanded for few; too narrow below 6',
    ),
  high: z.number(),
  rounds: z.number().describe('rounds timed, of which the steadiest is kept'),
  unsteady: z
    .literal(true)
    .optional()
    .describe('95th percentile of the pacer above 1.15 of its median in every round'),
  set_up: pacedTime.optional().describe('making a new end ready before its first message'),
  per_message: pacedTime
    .optional()
    .describe(
      'of a message beyond its symbols, against the same symbols as one message; absent where messages are filled',
    ),
});

const timed = z
  .strictObject({
    pacer: z.string(),
    symbol_count: z.number(),
    message_count: z.number().describe('where messages are filled, units'),
  })
  .describe('the beginning of the test part that was timed');

const account = z.strictObject(
  Object.fromEntries(ACCOUNT_LINES.map((line) => [line, z.number().optional()])) as Record<
    (typeof ACCOUNT_LINES)[number],
    z.ZodOptional<z.ZodNumber>
  >,
);

const operation = z.strictObject({
  total: z.number().describe('over all symbols, exact'),
  mean: z.number().describe('for each symbol'),
  worst: z
    .number()
    .describe('most of one symbol; a bound where steps, tables or raw messages go around a coder'),
});

const deviceEnd = z
  .strictObject({
    flash_bytes: z.number().optional().describe('tables'),
    ram_bytes: z
      .number()
      .optional()
      .describe(
        'state, own buffers, stack; measured on x86-64 where the coder has an exported form, else estimated',
      ),
    code_bytes: z.number().optional().describe('machine code; measured and estimated alike'),
    cycles_per_symbol: z
      .number()
      .optional()
      .describe('measured on the reader’s own target; a run leaves none'),
    operations: z
      .strictObject({
        multiplies: operation,
        divides: operation,
        table_reads: operation,
        branches: operation,
      })
      .optional()
      .describe('of the loop over symbols; without what sent tables take'),
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
  vary: z
    .strictObject({
      align: z.number().optional(),
      message_symbols: z.number().optional().describe('symbols of each message'),
      train_share: z.number().optional().describe('of the train part, the last of it'),
      fold: z.number().optional().describe('from 1: which block is the test part'),
    })
    .optional()
    .describe('what the cell differs in from the plan; absent for most'),
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
  messages: z
    .strictObject({
      grow_share: z
        .number()
        .describe('share of messages that take more than at a fixed width of ⌈log2 m⌉ bits'),
      largest_index: z
        .number()
        .describe('message of most carried bits, from 0, in the part that is coded'),
      worst: z
        .strictObject({
          index: z.number(),
          bytes: z.number().describe('carried'),
          fixed_width_bytes: z.number().describe('the same symbols at ⌈log2 m⌉ bits each'),
          first_unit: z.number().optional().describe('where messages are filled with units'),
        })
        .describe('the message that grows most, or shrinks least'),
    })
    .optional()
    .describe('which messages a coder serves badly, by index only; where there are several'),
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
  exports: z
    .array(z.enum(['json', 'c', 'ts']))
    .optional()
    .describe('forms in which the coder and its shipped tables can be exported'),
  timed: timed.optional(),
  encode: speed.optional(),
  decode: speed.optional(),
  table_build: pacedTime
    .optional()
    .describe('making the tables: from the train part, or what is coded where they are sent'),
  damage: z
    .array(cellDamageSchema)
    .optional()
    .describe('simulated damage to the coded messages, where the plan asks: no certification'),
  damage_failure: z.string().optional().describe('why damage could not be simulated'),
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
  message_symbols: z
    .number()
    .optional()
    .describe('symbols of each message, where the framing fixes them and the plan varies them'),
  folds: z
    .number()
    .optional()
    .describe(
      'the test part is each of so many blocks once; counts are over all of them, of the train part their mean',
    ),
  repeated_share: z.number().optional().describe('share of test messages that also occur in train'),
  in_pieces: z
    .literal(true)
    .optional()
    .describe('read in pieces, since memory does not hold it: see plan.memory_bytes'),
  sample: z
    .strictObject({
      blocks: z.number().describe('taken'),
      of_blocks: z.number(),
      block_bytes: z.number(),
      bytes: z.number().describe('of the messages in them'),
      of_bytes: z.number(),
      seed: z.number().optional().describe('where the blocks were drawn'),
    })
    .optional()
    .describe('only blocks of the files were read; each begins without what lies before it'),
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
    damage: damageSchema.optional(),
    memory_bytes: z.number().optional().describe('what the process was allowed to hold'),
    limits: limitsSchema.optional(),
    cost: costSchema.optional(),
    gate: gateSchema.optional(),
    weights: z
      .record(z.string(), z.number())
      .optional()
      .describe('of corpora, as the plan has them'),
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
