import type { CorpusRecord, EntropyRecord } from '../../src/harness/run-record.ts';

/** An entropy report made up by hand, with round figures, to hold the layout of its screen; nothing was counted for it. */

export const corpus: CorpusRecord = {
  name: 'uplink.bin',
  sha256: 'ab'.repeat(32),
  symbols_as: 'bytes',
  messages_as: 'records=1',
  lengths: 'link',
  alphabet_size: 256,
  source_bytes: 240_000,
  symbol_count: 120_000,
  message_count: 5_000,
  train_symbol_count: 120_000,
};

type Order = EntropyRecord['orders'][number];

const order = (k: number, corrected: number, rest: Partial<Order>): Order => ({
  k,
  plug_in: corrected - 0.02,
  corrected,
  low: corrected - 0.25,
  high: corrected + 0.25,
  positions: 100_000,
  contexts: 10 ** k,
  pairs: 40 * 10 ** k,
  estimable: true,
  estimable_reason: '100 symbols for each context seen, no bias correction',
  useful_reason: 'saves bits',
  interval_unit: '256 blocks of messages',
  interval_trusted: true,
  interval_reason: 'drawn from 256 units',
  estimates: {
    grassberger: corrected + 0.01,
    chao_shen: corrected + 0.03,
    ...(k === 0 ? { nsb: corrected } : {}),
  },
  ...rest,
});

const orders: Order[] = [
  order(0, 5, {
    useful: true,
    interval_trusted: false,
    interval_reason: 'order 1 lies below with its whole interval: order 0 is not enough',
  }),
  order(1, 4, {
    useful: true,
    interval_trusted: false,
    interval_reason: 'order 2 lies below with its whole interval: order 1 is not enough',
  }),
  order(2, 3, { useful: true }),
  order(3, 1.5, {
    useful: false,
    estimable: false,
    interval_trusted: false,
    interval_reason: 'order 3 is not estimable',
    estimable_reason: '3.4 symbols for each free parameter, 20 are needed',
  }),
];

const ceilings = [
  { name: 'fixed', rate: 8 },
  { name: 'arith:order=1', rate: 4.2 },
  { name: 'arith:order=2', rate: 3.4 },
];

/** One that finds no change, with all that there is to show. */
export const steady: EntropyRecord = {
  corpus: 'uplink.bin',
  contexts: 'message',
  orders,
  floor: {
    point: 3,
    low: 2.75,
    high: 3.4,
    method: 'corrected entropy of order 2 (Miller–Madow)',
    order: 2,
    cut: false,
  },
  ceilings,
  no_ceilings: [
    {
      name: 'arith:order=4',
      reason:
        'the contexts of this model need more memory than it may take (at most 900 MiB; here 1200 MiB)',
    },
    {
      name: 'ctw:depth=6',
      reason:
        'context-tree weighting would take too long on these data (at most 1000 symbols; here 120000 symbols)',
    },
  ],
  match_length: {
    rate: 3.1,
    low: 2.9,
    high: 3.3,
    valid: true,
    reason: 'matches of 4.5 symbols on average, against a twin of order 2',
    published: 2.8,
    lempel_ziv: 3.6,
    mean_match: 4.5,
    symbols_used: 120_000,
  },
  extrapolation: {
    rate: 0,
    upto: 2,
    valid: false,
    reason: 'the entropies do not level off yet',
  },
  block_view: [1, 2, 3].map((n) => ({
    n,
    blocks: Math.floor(120_000 / n),
    distinct: 40 * 50 ** (n - 1),
    plug_in: 5 / n + 2,
    corrected: 5 / n + 2.1,
    ...(n < 3 ? { nsb: 5 / n + 2.1 } : {}),
    huffman: 5 / n + 2.04,
    estimable: n < 3,
  })),
  drift: {
    tests: [
      {
        order: 0,
        found: false,
        reason: '40 % of random orders of the windows part as well or better',
      },
      { order: 1, reason: 'not tested: 700 different symbols are too many' },
    ],
    windows: {
      order: 0,
      own: Array.from({ length: 32 }, (_, w) => 4.5 + (w % 8) / 8),
      under_all: Array.from({ length: 32 }, () => 5),
      one_table_cost: 0.02,
      standard_error: 0.004,
    },
  },
  train_to_test: {
    order: 2,
    train_symbols: 60_000,
    priced_symbols: 60_000,
    excess: 0.25,
    standard_error: 0.01,
  },
  training_sizes: {
    order: 2,
    priced_symbols: 120_000,
    sizes: [1_200, 3_600, 12_000, 36_000, 120_000].map((train_symbols, i) => ({
      train_symbols,
      rate: 6 - i / 2,
      ...(i === 0 ? {} : { saving: 0.5, standard_error: 0.01 }),
    })),
  },
  resolution: {
    order: 2,
    symbols: 60_000,
    standard_error: 0.01,
    least_difference: 0.028,
    difference: 0.01,
    needed_symbols: 470_935,
  },
};

/** One whose estimate a coder contradicts, and whose source switches. */
export const contradicted: EntropyRecord = {
  ...steady,
  contexts: 'running',
  floor: {
    point: 2.5,
    low: 1.25,
    high: 2.5,
    method: 'what ctw:depth=6 reaches, below the corrected entropy of order 2',
    order: 2,
    cut: true,
  },
  ceilings: [...ceilings, { name: 'ctw:depth=6', rate: 2.5 }],
  drift: {
    tests: [0, 1].map((k) => ({
      order: k,
      found: true,
      reason: 'at most 0.05 % of random orders of the windows part as well',
    })),
    change: {
      order: 1,
      at_symbol: 60_000,
      window_symbols: 1_875,
      further: true,
      before: 4.5,
      after: 3.5,
      one_table_cost: 0.125,
    },
  },
};
