import { z } from 'zod';

/** The `entropy` part of the run record: estimates, bounds and what was found of change, for one corpus and one kind of contexts. */

const order = z.strictObject({
  k: z.number(),
  plug_in: z.number().describe('bits per symbol'),
  corrected: z.number().describe('Miller–Madow, bits per symbol'),
  low: z.number().optional(),
  high: z.number().optional(),
  positions: z.number(),
  contexts: z.number(),
  pairs: z.number(),
  estimable: z.boolean(),
  useful: z.boolean().optional().describe('absent: not tested'),
  estimable_reason: z.string().optional(),
  useful_reason: z.string().optional(),
  interval_unit: z.string().optional().describe('what was resampled, and how many'),
  interval_trusted: z.boolean().optional().describe('false: the interval may miss'),
  interval_reason: z.string().optional(),
  estimates: z
    .strictObject({
      grassberger: z.number(),
      chao_shen: z.number(),
      nsb: z.number().optional().describe('order 0 only'),
    })
    .optional()
    .describe('further estimates, bits per symbol; none is a bound'),
});

const drift = z.strictObject({
  tests: z.array(
    z.strictObject({
      order: z.number(),
      found: z.boolean().optional().describe('absent: not tested'),
      reason: z.string(),
    }),
  ),
  change: z
    .strictObject({
      order: z.number(),
      at_symbol: z.number(),
      window_symbols: z.number(),
      further: z.boolean().describe('a side changes again, or gradually'),
      before: z.number().optional().describe('bits per symbol; absent: a side is too short'),
      after: z.number().optional(),
      one_table_cost: z.number().optional(),
    })
    .optional(),
  windows: z
    .strictObject({
      order: z.number(),
      own: z.array(z.number()).describe('corrected entropy of each window, bits per symbol'),
      under_all: z.array(z.number()).describe('each window under one table for all data'),
      one_table_cost: z.number(),
      standard_error: z.number(),
    })
    .optional(),
});

export const entropySchema = z.strictObject({
  corpus: z.string(),
  data: z
    .string()
    .optional()
    .describe(
      'the corpus with its message size and fold as in the ids of cells, where the plan varies them',
    ),
  contexts: z.enum(['message', 'running']),
  orders: z.array(order),
  sampled_symbols: z
    .number()
    .optional()
    .describe('present: the figures rest on so many symbols in evenly spread pieces'),
  floor: z.strictObject({
    point: z.number(),
    low: z.number(),
    high: z.number(),
    method: z.string(),
    order: z.number(),
    cut: z
      .boolean()
      .describe('the lowest ceiling lies below the corrected entropy: order k is not enough'),
  }),
  ceilings: z
    .array(z.strictObject({ name: z.string(), rate: z.number() }))
    .optional()
    .describe('bounds: rates that verified decoders reach, bits per symbol'),
  no_ceilings: z
    .array(z.strictObject({ name: z.string(), reason: z.string() }))
    .optional()
    .describe('coders that gave no ceiling, and why'),
  match_length: z
    .strictObject({
      rate: z.number().describe('an estimate, bits per symbol'),
      low: z.number(),
      high: z.number(),
      valid: z.boolean(),
      reason: z.string(),
      published: z.number().describe('without correction of its bias'),
      lempel_ziv: z.number(),
      mean_match: z.number(),
      symbols_used: z.number(),
    })
    .optional(),
  extrapolation: z
    .strictObject({
      rate: z.number().describe('an estimate, bits per symbol'),
      upto: z.number(),
      valid: z.boolean(),
      reason: z.string(),
    })
    .optional(),
  block_view: z
    .array(
      z.strictObject({
        n: z.number(),
        blocks: z.number(),
        distinct: z.number(),
        plug_in: z.number().describe('H(X^n)/n of the blocks, bits per symbol'),
        corrected: z.number(),
        nsb: z.number().optional(),
        huffman: z.number().describe('a prefix code of the same blocks, tables apart'),
        estimable: z.boolean(),
      }),
    )
    .optional(),
  drift: drift.optional(),
  train_to_test: z
    .strictObject({
      order: z.number(),
      train_symbols: z.number(),
      priced_symbols: z.number(),
      excess: z.number().describe('bits per symbol that older training data cost'),
      standard_error: z.number(),
    })
    .optional(),
  training_sizes: z
    .strictObject({
      order: z.number(),
      priced_symbols: z.number(),
      sizes: z.array(
        z.strictObject({
          train_symbols: z.number(),
          rate: z.number(),
          saving: z.number().optional().describe('against the size before'),
          standard_error: z.number().optional(),
        }),
      ),
      enough_symbols: z.number().optional().describe('absent: more data still help'),
    })
    .optional(),
  resolution: z
    .strictObject({
      order: z.number().describe('the pair measured: this order and the one below'),
      symbols: z.number(),
      standard_error: z.number(),
      least_difference: z.number().describe('bits per symbol, seen four times in five'),
      difference: z.number().describe('the one asked for'),
      needed_symbols: z.number(),
    })
    .optional(),
});
