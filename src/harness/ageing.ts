import type { Setup } from '../coders/contract.ts';
import { trainOn } from '../coders/verify.ts';
import { firstAbove } from '../corpus/corpus.ts';
import { messageCountOf, type SymbolSequence, sliceMessages } from '../symbols/sequence.ts';
import type { Cell } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import type { RunRecord } from './run-record.ts';
import { setupBase } from './setup-base.ts';

/** One stretch of the test part, in time. */
export interface AgeingSegment {
  /** Symbols from the end of the train part to the beginning of the segment. */
  readonly distance: number;
  readonly symbolCount: number;
  /** Ideal bits per symbol with the shipped tables. */
  readonly rate: number;
  /** The same with tables trained on all that lies before the segment. */
  readonly retrainedRate: number;
}

/** How shipped tables age. */
export interface Ageing {
  readonly cellId: string;
  readonly segments: readonly AgeingSegment[];
  /** Bits that new tables take when they are sent as the coder sends tables; undefined where it never sends any. */
  readonly tableBits: number | undefined;
  /**
   * Symbols after the train part by which the bits lost to old tables, against tables trained anew at each segment, exceed what
   * sending new tables takes; undefined where they never do in these data, or tables are never sent.
   */
  readonly paysAfter: number | undefined;
}

const SEGMENTS = 8;

/** Bits of tables trained on `sequence`, as the coder writes them under `sent`. */
function tableBitsOf(cell: Cell, setup: Setup, sequence: SymbolSequence): number | undefined {
  if (!cell.candidate.declaration.policies.includes('sent')) return undefined;
  const { fill: _, ...base } = setup;
  const sent: Setup = { ...base, policy: 'sent', reset: 'never' };
  const tables = trainOn(cell.candidate, sent, sequence);
  const encoder = cell.candidate
    .create()
    .encoder(tables === undefined ? sent : { ...sent, tables });
  encoder.push(sequence);
  return encoder.finish().account.tableBits;
}

/**
 * Ideal code lengths of a shipped cell by distance from the train part, with old tables and with tables trained on everything
 * before each segment. Meaningful where train lies before test in time.
 * @param messageEnds  of the cell, where messages are filled and those of the corpus are units
 * @returns undefined where there is nothing to train on, too few messages, or no probabilities
 * Cost: about {@link SEGMENTS} trainings and twice as many pricings.
 */
export function ageingOf(
  cell: Cell,
  corpus: CorpusData,
  messageEnds: Uint32Array = corpus.test.messageEnds,
): Ageing | undefined {
  const { train } = corpus;
  const test: SymbolSequence = { ...corpus.test, messageEnds };
  const messageCount = messageCountOf(test);
  const coder = cell.candidate.create();
  if (train === undefined || coder.price === undefined || messageCount < SEGMENTS) return undefined;
  const base = setupBase(corpus, 'shipped', 'message', cell.align);
  const withTables = (parts: readonly SymbolSequence[]): Setup => {
    const trainer = coder.trainer!(base);
    for (const part of parts) trainer.push(part);
    return { ...base, tables: trainer.finish() };
  };
  const old = withTables([train]);
  const segments: AgeingSegment[] = [];
  let distance = 0;
  for (let i = 0; i < SEGMENTS; i++) {
    const from = Math.floor((i * messageCount) / SEGMENTS);
    const segment = sliceMessages(test, from, Math.floor(((i + 1) * messageCount) / SEGMENTS));
    const symbolCount = segment.symbols.length;
    if (symbolCount > 0) {
      const fresh = from === 0 ? old : withTables([train, trainedBefore(test, corpus, from)]);
      segments.push({
        distance,
        symbolCount,
        rate: coder.price(segment, old).idealBits / symbolCount,
        retrainedRate: coder.price(segment, fresh).idealBits / symbolCount,
      });
    }
    distance += symbolCount;
  }
  const tableBits = tableBitsOf(cell, base, train);
  return { cellId: cell.id, segments, tableBits, paysAfter: paysAfter(segments, tableBits) };
}

/** What of the test part lies before a message, in the messages or units that training takes. */
function trainedBefore(
  test: SymbolSequence,
  corpus: CorpusData,
  messageIndex: number,
): SymbolSequence {
  if (corpus.fill === undefined) return sliceMessages(test, 0, messageIndex);
  const { messageEnds } = corpus.test;
  return sliceMessages(corpus.test, 0, firstAbove(messageEnds, test.messageEnds[messageIndex - 1]));
}

function paysAfter(
  segments: readonly AgeingSegment[],
  tableBits: number | undefined,
): number | undefined {
  if (tableBits === undefined) return undefined;
  let lost = 0;
  for (const { distance, symbolCount, rate, retrainedRate } of segments) {
    lost += (rate - retrainedRate) * symbolCount;
    if (lost > tableBits) return distance + symbolCount;
  }
  return undefined;
}

/** As a run record says it. */
export function ageingRecordOf(
  corpus: string,
  ageing: Ageing,
): NonNullable<RunRecord['ageing']>[number] {
  return {
    corpus,
    cell: ageing.cellId,
    segments: ageing.segments.map((segment) => ({
      distance: segment.distance,
      symbol_count: segment.symbolCount,
      rate: segment.rate,
      retrained_rate: segment.retrainedRate,
    })),
    ...(ageing.tableBits === undefined ? {} : { table_bits: ageing.tableBits }),
    ...(ageing.paysAfter === undefined ? {} : { pays_after: ageing.paysAfter }),
  };
}
