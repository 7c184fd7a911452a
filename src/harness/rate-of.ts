import { parseCandidate } from '../coders/candidate.ts';
import type { Reset, TablePolicy } from '../coders/contract.ts';
import { InputError } from '../errors/errors.ts';
import { listCells } from './cells.ts';
import { type MemoryCorpusOptions, type MessageData, memoryCorpus } from './memory-corpus.ts';
import { runCell } from './run-cell.ts';

/** How data are coded, besides by which candidate. */
export interface RateOptions extends MemoryCorpusOptions {
  /** Absent: `shipped` where there is data to train on, else the first that the coder declares of `none`, `learned`, `sent`. */
  readonly tables?: TablePolicy;
  /** Absent: `message`. */
  readonly reset?: Reset;
  /** Each message's bits are padded to a multiple of this; 8 unless said. */
  readonly align?: 1 | 8 | 16 | 32 | 64;
}

/** What data take with one candidate; every decode was compared with its input. */
export interface Rate {
  readonly candidate: string;
  readonly tables: TablePolicy;
  readonly reset: Reset;
  readonly symbolCount: number;
  readonly messageCount: number;
  /** Everything counted, padding included. */
  readonly carriedBits: number;
  /** Carried bits of a symbol; 0 where there is none. */
  readonly bitsPerSymbol: number;
  /** Carried bits of each message. */
  readonly messageBits: Float64Array;
  /** For each message the index one past its last symbol: as given, or as the coder filled them. */
  readonly messageEnds: Uint32Array;
  /** −Σ log2 of the coder's probabilities; absent for coders without. */
  readonly idealBits?: number;
}

function usualTables(declared: readonly TablePolicy[], trained: boolean): TablePolicy {
  const order: readonly TablePolicy[] = trained
    ? ['shipped', 'none', 'learned', 'sent']
    : ['none', 'learned', 'sent'];
  const found = order.find((policy) => declared.includes(policy));
  if (found === undefined) {
    throw new InputError('this coder needs data to train on', {
      expected: `tables ${declared.join(', ')}`,
      advice: 'Give `train`.',
    });
  }
  return found;
}

/**
 * Codes data in memory, decodes it again with a new coder that sees only what policy and framing grant, compares, and says
 * what it took.
 * @param candidate  as on the command line, without ranges: `arith:order=1`
 * @throws InputError for a candidate, policy or reset that does not exist or does not suit, and for a decode that differs
 */
export async function rateOf(
  data: MessageData,
  candidate: string,
  options: RateOptions = {},
): Promise<Rate> {
  const parsed = parseCandidate(candidate);
  const corpus = memoryCorpus('data', data, options);
  const trained = corpus.train !== undefined;
  const tables = options.tables ?? usualTables(parsed.declaration.policies, trained);
  if ((tables === 'shipped' || tables === 'primed') && !trained) {
    throw new InputError(`tables ${tables} need data to train on`, { advice: 'Give `train`.' });
  }
  const reset = options.reset ?? 'message';
  const { cells } = listCells(['data'], [parsed], [tables], [reset], {
    align: options.align ?? 8,
    ...(corpus.fill === undefined ? {} : { filled: new Set(['data']) }),
    ...(corpus.record === undefined ? {} : { records: new Set(['data']) }),
  });
  const result = await runCell(cells[0], corpus, async () => {});
  if ('failure' in result) throw new InputError(result.failure, { coder: parsed.id });
  const { totals, messageBits, messageEnds } = result;
  const symbolCount = corpus.test.symbols.length;
  return {
    candidate: parsed.id,
    tables: cells[0].policy,
    reset: cells[0].reset,
    symbolCount,
    messageCount: messageBits.length,
    carriedBits: totals.carriedBits,
    bitsPerSymbol: symbolCount === 0 ? 0 : totals.carriedBits / symbolCount,
    messageBits,
    messageEnds,
    ...(totals.idealBits === undefined ? {} : { idealBits: totals.idealBits }),
  };
}
