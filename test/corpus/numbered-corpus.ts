import type { Corpus, CorpusFile } from '../../src/corpus/corpus.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

/** A corpus whose symbols are numbered, so that each tells where it came from: its files, each with lengths of messages. */
export function numberedCorpus(files: readonly (readonly number[])[]): Corpus {
  const lengths = files.flat();
  let total = 0;
  const messageEnds = Uint32Array.from(lengths, (length) => {
    total += length;
    return total;
  });
  let messages = 0;
  const fileEnds = Uint32Array.from(files, (file) => {
    messages += file.length;
    return messages;
  });
  return {
    name: 'telemetry',
    files: files.map(
      (file, i): CorpusFile => ({
        path: `${i}.bin`,
        sha256: '',
        byteCount: 0,
        messageCount: file.length,
        symbolCount: file.reduce((sum, length) => sum + length, 0),
      }),
    ),
    sha256: '',
    symbolsAs: 'bytes',
    messagesAs: 'whole',
    lengths: 'sent',
    sourceBytes: total,
    fileEnds,
    alphabet: { kind: 'given' },
    sequence: {
      alphabetSize: 65536,
      symbols: Uint16Array.from({ length: total }, (_, i) => i),
      messageEnds,
    },
  };
}

/** The symbols of each message. */
export function messagesOf(sequence: SymbolSequence): number[][] {
  return Array.from(sequence.messageEnds, (end, i) => [
    ...sequence.symbols.subarray(i === 0 ? 0 : sequence.messageEnds[i - 1], end),
  ]);
}
