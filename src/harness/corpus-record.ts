import type { CorpusData } from './corpus-data.ts';
import type { CorpusRecord } from './run-record.ts';

/** What a record says of a corpus: hashes and counts, nothing of its content. */
export function corpusRecordOf(corpus: CorpusData): CorpusRecord {
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
  };
}
