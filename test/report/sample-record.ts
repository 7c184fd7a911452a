import type { MessagePairs } from '../../src/harness/run-all.ts';
import type { CellRecord, RunRecord } from '../../src/harness/run-record.ts';

/** A record made up by hand, with round figures, to hold the layout of screens; no coder was run for it. */

const paced = (pacerSymbols: number): NonNullable<CellRecord['table_build']> => ({
  seconds: pacerSymbols / 6e6,
  pacer_symbols: pacerSymbols,
  low: pacerSymbols * 0.9,
  high: pacerSymbols * 1.1,
});

const speed = (value: number): NonNullable<CellRecord['encode']> => ({
  seconds: new Array<number>(6).fill(0.01),
  pacer_seconds: new Array<number>(6).fill(0.01 * value),
  set_up: paced(4000),
  per_message: paced(12),
  median: 0.01,
  p95: 0.01,
  rounds: 1,
  speed: value,
  low: value * 0.95,
  high: value * 1.05,
});

interface Sample {
  readonly corpus: string;
  readonly candidate: string;
  readonly tables: string;
  readonly reset?: string;
  readonly messages: number;
  readonly symbols: number;
  readonly account: CellRecord['account'];
  readonly reference?: boolean;
  readonly speeds?: readonly [number, number];
}

function cell(sample: Sample): CellRecord {
  const { corpus, candidate, tables, reset = 'message', messages, symbols, account = {} } = sample;
  const bits = Object.values(account).reduce((sum: number, value) => sum + (value ?? 0), 0);
  const mean = bits / 8 / messages;
  const most = messages === 1 ? mean : 1.5 * mean;
  return {
    id: `${corpus}/${candidate}@${tables}/${reset}`,
    corpus,
    candidate,
    coder: candidate.split(':')[0],
    params: candidate === 'block-huffman:n=2' ? { n: 2 } : {},
    tables,
    reset,
    reference: sample.reference === true,
    decodes_alone: tables === 'shipped' || reset === 'message',
    messages_as: messages === 1 ? 'whole' : 'lines',
    verified: true,
    backend: 'ts',
    symbol_count: symbols,
    message_count: messages,
    coded_bytes: Math.ceil(bits / 8),
    carried_bits: bits,
    rate: bits / symbols,
    account,
    message_bytes: { mean, p50: mean, p95: most, p99: most, max: most },
    ...(messages === 1
      ? {}
      : {
          messages: {
            grow_share: most > symbols / messages ? 0.125 : 0,
            largest_index: 417,
            worst: { index: 417, bytes: most, fixed_width_bytes: symbols / messages },
          },
        }),
    files: [{ sha256: 'ab'.repeat(32), symbol_count: symbols, coded_bytes: Math.ceil(bits / 8) }],
    ...(sample.speeds === undefined
      ? {}
      : {
          timed: { pacer: 'deflate-huffman', symbol_count: symbols, message_count: messages },
          encode: speed(sample.speeds[0]),
          decode: speed(sample.speeds[1]),
          ...(tables === 'shipped' ? { table_build: paced(30_000) } : {}),
        }),
  };
}

const order = (k: number, corrected: number, estimable: boolean, useful: boolean) => ({
  k,
  plug_in: corrected - 0.01,
  corrected,
  low: corrected - 0.05,
  high: corrected + 0.05,
  positions: 100_000 - k,
  contexts: 10 ** k,
  pairs: 40 * 10 ** k,
  estimable,
  useful,
});

const orders = [
  order(0, 5, true, true),
  order(1, 4, true, true),
  order(2, 3, true, true),
  order(3, 2, false, false),
];

const base = {
  record: 1 as const,
  tool: { name: 'bitassay' as const, version: '0.0.0' },
  environment: {
    node: '20.0.0',
    zlib: '1.3',
    cpu: 'a processor',
    cores: 2,
    os: 'a system',
    class: '0123456789ab',
  },
  undeclared: 0,
  partial: false,
};

const whole = { corpus: 'uplink.bin', messages: 1, symbols: 100_000 };

/** One file as one message; the floor is 3 bits a byte. */
export const wholeRecord: RunRecord = {
  ...base,
  plan: {
    title: 'uplink.bin',
    align: 8,
    split: 'none: all data are coded',
    tables: ['sent', 'learned'],
    resets: ['message'],
  },
  corpora: [
    {
      name: 'uplink.bin',
      sha256: 'ab'.repeat(32),
      symbols_as: 'bytes',
      messages_as: 'whole',
      lengths: 'sent',
      alphabet_size: 256,
      source_bytes: 100_000,
      symbol_count: 100_000,
      message_count: 1,
      train_symbol_count: 0,
    },
  ],
  entropy: [
    {
      corpus: 'uplink.bin',
      contexts: 'message',
      orders,
      floor: {
        point: 3,
        low: 2.9,
        high: 3.4,
        method: 'corrected entropy of order 2',
        order: 2,
        cut: false,
      },
    },
  ],
  cells: [
    cell({
      ...whole,
      candidate: 'fixed',
      tables: 'none',
      account: { floor: 300_000, structure: 499_968, framing: 32 },
    }),
    cell({
      ...whole,
      candidate: 'huffman',
      tables: 'sent',
      account: {
        floor: 300_000,
        structure: 200_000,
        learning: 0,
        rounding: 4_000,
        tables: 900,
        framing: 28,
        ends: 4,
      },
    }),
    cell({
      ...whole,
      candidate: 'block-huffman:n=2',
      tables: 'sent',
      account: {
        floor: 300_000,
        structure: 150_000,
        rounding: 2_000,
        tables: 60_000,
        framing: 28,
        ends: 4,
      },
    }),
    cell({
      ...whole,
      candidate: 'arith:order=1',
      tables: 'learned',
      account: {
        floor: 300_000,
        structure: 20_000,
        learning: 20_000,
        rounding: 0,
        framing: 28,
        ends: 4,
      },
    }),
    cell({
      ...whole,
      candidate: 'brotli',
      tables: 'none',
      reference: true,
      account: { floor: 300_000, above_floor: 48_000 },
    }),
    {
      ...cell({ ...whole, candidate: 'arith:order=8', tables: 'learned', account: {} }),
      verified: false,
      failure:
        'the context tables would need 1.4 GB (expected at most 900 MB, got 1.4 GB). Take a lower order.',
    },
  ],
};

const lines = { corpus: 'events', messages: 1_000, symbols: 60_000 };

/** Lines of a log, half of them train; several resets, times and a cell below zero. */
export const linesRecord: RunRecord = {
  ...base,
  undeclared: 12,
  plan: {
    title: 'Reefer trackers over a satellite link',
    align: 8,
    split: 'the first 50 % by message',
    tables: ['shipped', 'sent', 'learned'],
    resets: ['message', 'never'],
  },
  corpora: [
    {
      name: 'events',
      sha256: 'cd'.repeat(32),
      symbols_as: 'bytes',
      messages_as: 'lines',
      lengths: 'sent',
      alphabet_size: 256,
      source_bytes: 120_000,
      symbol_count: 60_000,
      message_count: 1_000,
      train_symbol_count: 60_000,
      repeated_share: 0.12,
    },
  ],
  entropy: (['message', 'running'] as const).map((contexts) => ({
    corpus: 'events',
    contexts,
    orders,
    floor: {
      point: 3,
      low: 2.9,
      high: 3.4,
      method: 'corrected entropy of order 2',
      order: 2,
      cut: false,
    },
  })),
  cells: [
    cell({
      ...lines,
      candidate: 'arith:order=1',
      tables: 'shipped',
      speeds: [0.25, 0.2],
      account: {
        floor: 180_000,
        opening: 6_000,
        structure: 24_000,
        learning: 6_000,
        rounding: 600,
        framing: 11_000,
        ends: 4_400,
      },
    }),
    cell({
      ...lines,
      candidate: 'arith:order=1',
      tables: 'learned',
      speeds: [0.21, 0.18],
      account: {
        floor: 180_000,
        opening: 6_000,
        structure: 24_000,
        learning: 160_000,
        framing: 11_000,
        ends: 5_000,
      },
    }),
    cell({
      ...lines,
      candidate: 'arith:order=1',
      tables: 'learned',
      reset: 'never',
      speeds: [0.3, 0.26],
      account: { floor: 180_000, structure: 24_000, learning: 9_000, framing: 11_000, ends: 5_000 },
    }),
    cell({
      ...lines,
      candidate: 'huffman',
      tables: 'sent',
      speeds: [0.9, 1.2],
      account: {
        floor: 180_000,
        opening: 6_000,
        structure: 120_000,
        learning: -30_000,
        rounding: 9_000,
        tables: 96_000,
        framing: 11_000,
        ends: 4_000,
      },
    }),
  ],
};

/**
 * Bits of each message of {@link linesRecord}: even, but for the shipped cell, whose messages need 20 bits more and 20 bits
 * less in turns of 41, so that one block of them differs from the next by far more than the cells differ in all.
 */
export const linesMessages: ReadonlyMap<string, MessagePairs> = new Map(
  linesRecord.cells.map((cell) => [
    cell.id,
    {
      bits: Float64Array.from({ length: 1_000 }, (_, i) => {
        const swing = cell.tables === 'shipped' ? 20 * (-1) ** Math.floor(i / 41) : 0;
        return cell.carried_bits! / 1_000 + swing;
      }),
      symbols: new Float64Array(1_000).fill(60),
    },
  ]),
);
