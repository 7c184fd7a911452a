import type { MessagePairs } from '../../src/harness/run-all.ts';
import type { CellRecord, RunRecord } from '../../src/harness/run-record.ts';
import { linesRecord } from '../report/sample-record.ts';

export interface MadeUpCell {
  readonly id: string;
  /** Of each message. */
  readonly bits: readonly number[];
  /** Of each message; 100 each when absent. */
  readonly symbols?: readonly number[];
  readonly more?: Partial<CellRecord>;
}

const sum = (values: readonly number[]) => values.reduce((total, value) => total + value, 0);

/** A run of which only messages are known, made up; ids are `corpus/candidate@tables/reset`, with a variation if need be. */
export function madeUpRun(cells: readonly MadeUpCell[]): {
  record: RunRecord;
  messages: Map<string, MessagePairs>;
} {
  const messages = new Map<string, MessagePairs>();
  const records = cells.map(({ id, bits, symbols = bits.map(() => 100), more }): CellRecord => {
    const [, corpus, candidate, tables, reset] = /^(.*?)\/(.*)@(.*)\/([^+]*)/.exec(id)!;
    messages.set(id, {
      bits: Float64Array.from(bits),
      symbols: Float64Array.from(symbols),
    });
    return {
      ...linesRecord.cells[0],
      id,
      corpus,
      candidate,
      tables,
      reset,
      account: {},
      carried_bits: sum(bits),
      symbol_count: sum(symbols),
      message_count: bits.length,
      rate: sum(bits) / sum(symbols),
      ...more,
    };
  });
  const names = [...new Set(records.map((cell) => cell.corpus))];
  return {
    messages,
    record: {
      ...linesRecord,
      corpora: names.map((name) => ({ ...linesRecord.corpora[0], name })),
      cells: records,
    },
  };
}
