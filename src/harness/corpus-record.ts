import type { SampleFacts } from '../corpus/sample-rule.ts';
import type { CorpusData, CorpusShape } from './corpus-data.ts';
import type { CorpusRecord } from './run-record.ts';

/**
 * One entry for each corpus of a run, of its own data without what the plan varies. Folds are one: their test parts together,
 * and the mean of their train parts.
 */
export function corpusRecordsOf(data: readonly CorpusData[]): CorpusRecord[] {
  const byName = new Map<string, CorpusData[]>();
  for (const one of data) {
    if (one.vary?.messageSymbols !== undefined || one.vary?.trainShare !== undefined) continue;
    byName.set(one.name, [...(byName.get(one.name) ?? []), one]);
  }
  return [...byName.values()].map((own) => {
    const records = own.map(corpusRecordOf);
    const messageSymbols = data.some((one) => one.vary?.messageSymbols !== undefined)
      ? own[0].messageSymbols
      : undefined;
    return {
      ...pooledRecord(records),
      ...(messageSymbols === undefined ? {} : { message_symbols: messageSymbols }),
    };
  });
}

function pooledRecord(folds: readonly CorpusRecord[]): CorpusRecord {
  const [first] = folds;
  if (folds.length === 1) return first;
  const sum = (of: (fold: CorpusRecord) => number): number =>
    folds.reduce((total, fold) => total + of(fold), 0);
  const repeated = sum((fold) => (fold.repeated_share ?? 0) * fold.message_count);
  return {
    ...first,
    symbol_count: sum((fold) => fold.symbol_count),
    message_count: sum((fold) => fold.message_count),
    ...(first.unit_count === undefined ? {} : { unit_count: sum((fold) => fold.unit_count!) }),
    train_symbol_count: Math.round(sum((fold) => fold.train_symbol_count) / folds.length),
    repeated_share: repeated / sum((fold) => fold.message_count),
    folds: folds.length,
  };
}

/** What a record says of a corpus: hashes and counts, nothing of its content. */
export function corpusRecordOf(corpus: CorpusShape): CorpusRecord {
  return {
    name: corpus.name,
    sha256: corpus.sha256,
    symbols_as: corpus.symbolsAs,
    messages_as: corpus.messagesAs,
    lengths: corpus.lengths,
    alphabet_size: corpus.alphabetSize,
    ...(corpus.record === undefined ? {} : { record_bytes: corpus.record.bytes }),
    source_bytes: corpus.sourceBytes,
    symbol_count: corpus.test.symbols.length,
    message_count: corpus.test.messageEnds.length,
    ...(corpus.fill === undefined
      ? {}
      : { unit_count: corpus.test.messageEnds.length, fill_bytes: corpus.fill.bytes }),
    train_symbol_count: corpus.train?.symbols.length ?? 0,
    ...(corpus.repeated === undefined ? {} : { repeated_share: corpus.repeated.share }),
    ...(corpus.sample === undefined ? {} : { sample: sampleRecord(corpus.sample) }),
  };
}

function sampleRecord(facts: SampleFacts): NonNullable<CorpusRecord['sample']> {
  const { rule, blocks, ofBlocks, bytes, ofBytes } = facts;
  return {
    blocks,
    of_blocks: ofBlocks,
    block_bytes: rule.blockBytes,
    bytes,
    of_bytes: ofBytes,
    ...(rule.kind === 'reservoir' ? { seed: rule.seed } : {}),
  };
}
