import { z } from 'zod';

const spread = z.strictObject({
  mean: z.number(),
  mean_error: z
    .number()
    .describe('half of the 95 % interval of the mean, by the normal law over independent events'),
  p95: z.number(),
  max: z.number(),
});

/** What damage does to a cell: one entry a kind. */
export const cellDamageSchema = z
  .strictObject({
    kind: z.enum(['flip', 'lose_bytes', 'lose_messages']),
    probability: z
      .number()
      .optional()
      .describe('that a bit is flipped, a byte lost or a message lost, whatever became of others'),
    good_to_bad: z.number().optional().describe('Gilbert–Elliott losses: before each message'),
    bad_to_good: z.number().optional(),
    lost_in_bad: z.number().optional(),
    lost_in_good: z.number().optional(),
    seed: z.number(),
    share: z.number().describe('of messages that are damaged or lost: exact for the model'),
    unusable_share: z
      .number()
      .optional()
      .describe(
        'most of all messages that are lost or spoiled: if a lost one spoils all up to the reset; exact for the model',
      ),
    events: z
      .number()
      .describe(
        'simulated: a damaged message, or a run of lost ones; the figures below are of these',
      ),
    errors: z.number().describe('flipped bits, lost bytes or lost messages in all events'),
    detected: z.number().describe('events in which the decoder stopped with an error'),
    by_check: z
      .number()
      .describe('events that no decoder saw, and a CRC-32 of each message’s symbols would'),
    undetected: z.number().describe('events that neither would see, with symbols lost'),
    harmless: z.number().describe('events after which every symbol came out as it was'),
    symbols_lost: spread.describe(
      'symbols missing or wrong at their place; all from the damaged message up to the reset where the decoder stopped',
    ),
    recovery: spread
      .optional()
      .describe(
        'symbols from the first lost one to the place from which all are right, at most to the reset or the end; over events that lose any',
      ),
    messages_after: spread.describe('messages after the damaged ones up to the last that is wrong'),
  })
  .describe('one damage at a time; p95 is the least figure that 95 % of events do not exceed');

/** The figures of one kind of damage, as a run record holds them. */
export type CellDamage = z.infer<typeof cellDamageSchema>;
