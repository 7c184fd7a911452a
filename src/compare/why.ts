import { ACCOUNT_LINES, type AccountLine } from '../account/bit-account.ts';
import { InputError } from '../errors/errors.ts';
import type { MessagePairs } from '../harness/run-all.ts';
import type { CellRecord, RunRecord } from '../harness/run-record.ts';
import { type Comparison, compareCells } from './compare-cells.ts';

/** One line of the account of two cells, in bits per symbol. */
export interface LineDifference {
  readonly line: AccountLine;
  readonly a: number;
  readonly b: number;
}

/** Two cells of one corpus side by side. */
export interface Why {
  readonly a: CellRecord;
  readonly b: CellRecord;
  /** Bits per symbol, b − a. */
  readonly difference: number;
  /** Absent where there are too few messages for an interval. */
  readonly comparison?: Comparison;
  /** Lines that either of them has, floor apart. */
  readonly lines: readonly LineDifference[];
}

/** Names shown where there are many. */
const MOST_NAMES = 6;

function listed(names: readonly string[]): string {
  const more = names.length - MOST_NAMES;
  return more <= 0 ? names.join(', ') : `${names.slice(0, MOST_NAMES).join(', ')} and ${more} more`;
}

/** The cell that a text names: its whole id, or a part that only one has. */
export function cellNamed(record: RunRecord, text: string): CellRecord {
  const exact = record.cells.find((cell) => cell.id === text);
  if (exact !== undefined) return exact;
  const found = record.cells.filter((cell) => cell.id.includes(text));
  if (found.length === 1) return found[0];
  throw new InputError(
    `${text} names ${found.length === 0 ? 'no' : found.length} cells of this run`,
    {
      expected: 'the id of a cell, or a part that only one has',
      got: found.length === 0 ? text : listed(found.map((cell) => cell.id)),
      advice: 'The table of `bitassay run` and the key cells in run.json have the ids.',
    },
  );
}

/**
 * Puts two cells side by side.
 * @throws InputError for cells of two corpora, or that failed
 */
export function whyOf(
  record: RunRecord,
  messages: ReadonlyMap<string, MessagePairs>,
  a: CellRecord,
  b: CellRecord,
): Why {
  if (a.corpus !== b.corpus) {
    throw new InputError('cells of two corpora cannot be compared', { got: `${a.id} and ${b.id}` });
  }
  const failed = [a, b].find((cell) => !cell.verified);
  if (failed !== undefined) {
    throw new InputError(`${failed.id} failed and has no rate`, { got: failed.failure ?? '' });
  }
  const [pairsA, pairsB] = [messages.get(a.id), messages.get(b.id)];
  const fewest = Math.min(a.message_count!, b.message_count!);
  const comparison =
    pairsA === undefined || pairsB === undefined
      ? undefined
      : compareCells(
          a.corpus,
          { id: a.id, pairs: pairsA },
          { id: b.id, pairs: pairsB },
          a.unit_count === undefined ? undefined : fewest,
        );
  const symbols = record.corpora.find((corpus) => corpus.name === a.corpus)!.symbol_count;
  const lines = ACCOUNT_LINES.filter((line) => line !== 'floor').flatMap((line) => {
    const [bitsA, bitsB] = [a.account?.[line], b.account?.[line]];
    if (bitsA === undefined && bitsB === undefined) return [];
    return [{ line, a: (bitsA ?? 0) / symbols, b: (bitsB ?? 0) / symbols }];
  });
  return {
    a,
    b,
    difference: b.rate! - a.rate!,
    ...(comparison === undefined ? {} : { comparison }),
    lines,
  };
}
