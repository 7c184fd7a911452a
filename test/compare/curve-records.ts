import type { CellRecord, EntropyRecord, RunRecord } from '../../src/harness/run-record.ts';

/** Run records made up by hand, with round figures, for what is told from records alone; no coder was run for them. */

export interface Made {
  readonly candidate: string;
  readonly params?: CellRecord['params'];
  readonly tables?: string;
  readonly reset?: string;
  readonly vary?: CellRecord['vary'];
  readonly rate: number;
  readonly messages_as?: string;
  readonly reference?: boolean;
  /** 95 % interval of the mean, as parts of it. */
  readonly interval?: readonly [number, number];
  readonly more?: Partial<CellRecord>;
}

const SYMBOLS = 1000;
const MESSAGES = 10;

export function madeCell(made: Made): CellRecord {
  const { candidate, params = {}, tables = 'shipped', reset = 'message', vary, rate } = made;
  const { messages_as = 'every=100', interval } = made;
  const bits = rate * SYMBOLS;
  const mean = bits / 8 / MESSAGES;
  const suffix = (['align', 'message_symbols', 'train_share', 'fold'] as const)
    .map((key) => (vary?.[key] === undefined ? '' : `+${key}=${vary[key]}`))
    .join('');
  return {
    id: `a/${candidate}@${tables}/${reset}${suffix}`,
    corpus: 'a',
    candidate,
    coder: candidate.split(':')[0],
    params,
    tables,
    reset,
    reference: made.reference === true,
    ...(vary === undefined ? {} : { vary }),
    decodes_alone: tables === 'shipped' || reset === 'message',
    messages_as,
    verified: true,
    symbol_count: SYMBOLS,
    message_count: MESSAGES,
    coded_bytes: Math.ceil(bits / 8),
    carried_bits: bits,
    rate,
    account: { floor: 2 * SYMBOLS, structure: bits - 2 * SYMBOLS },
    message_bytes: {
      mean,
      ...(interval === undefined
        ? {}
        : { mean_low: mean * interval[0], mean_high: mean * interval[1] }),
      p50: mean,
      p95: mean,
      p99: mean,
      max: mean,
    },
    ...made.more,
  };
}

export function madeEntropy(rates: readonly number[], data?: string): EntropyRecord {
  return {
    corpus: 'a',
    ...(data === undefined ? {} : { data }),
    contexts: 'message',
    orders: rates.map((rate, k) => ({
      k,
      plug_in: rate,
      corrected: rate,
      low: rate - 0.1,
      high: rate + 0.1,
      positions: 1000,
      contexts: 10,
      pairs: 100,
      estimable: k < 2,
    })),
    floor: { point: 2, low: 1.5, high: 2.5, method: 'by hand', order: 1, cut: false },
  };
}

export function madeRecord(
  cells: readonly CellRecord[],
  entropy: readonly EntropyRecord[] = [madeEntropy([4, 3, 2.5])],
  corpus: Partial<RunRecord['corpora'][number]> = {},
): RunRecord {
  return {
    record: 1,
    tool: { name: 'bitassay', version: '0.0.0' },
    plan: { title: 'By hand', align: 8, split: 'by hand', tables: [], resets: [] },
    environment: { node: '', zlib: '', cpu: '', cores: 1, os: '', class: '' },
    corpora: [
      {
        name: 'a',
        sha256: '',
        symbols_as: 'bytes',
        messages_as: 'every=100',
        lengths: 'link',
        alphabet_size: 256,
        source_bytes: 2 * SYMBOLS,
        symbol_count: SYMBOLS,
        message_count: MESSAGES,
        train_symbol_count: SYMBOLS,
        message_symbols: 100,
        ...corpus,
      },
    ],
    entropy: [...entropy],
    cells: [...cells],
    undeclared: 0,
    partial: false,
  };
}
