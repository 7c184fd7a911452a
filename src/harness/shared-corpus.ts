import type { SymbolSequence } from '../symbols/sequence.ts';
import type { CorpusData } from './corpus-data.ts';

type Bytes = Uint8Array | Uint16Array | Uint32Array;

/**
 * The same corpora in memory that all threads share, so that none is copied for a worker. Arrays that lay in one buffer, as
 * folds and shares of a train part do, lie in one buffer again; what is shared already stays.
 */
export function shareCorpora(corpora: readonly CorpusData[]): CorpusData[] {
  const copies = new Map<ArrayBufferLike, SharedArrayBuffer>();
  const shared = <T extends Bytes>(array: T): T => {
    const { buffer, byteOffset, length } = array;
    if (buffer instanceof SharedArrayBuffer) return array;
    const copy = copies.get(buffer) ?? new SharedArrayBuffer(buffer.byteLength);
    if (!copies.has(buffer)) new Uint8Array(copy).set(new Uint8Array(buffer));
    copies.set(buffer, copy);
    if (array instanceof Uint8Array) return new Uint8Array(copy, byteOffset, length) as T;
    if (array instanceof Uint16Array) return new Uint16Array(copy, byteOffset, length) as T;
    return new Uint32Array(copy, byteOffset, length) as T;
  };
  const sequence = ({ alphabetSize, symbols, messageEnds }: SymbolSequence): SymbolSequence => ({
    alphabetSize,
    symbols: shared(symbols),
    messageEnds: shared(messageEnds),
  });
  return corpora.map((corpus) => {
    const { train, test, repeated, sentMap } = corpus;
    return {
      ...corpus,
      test: sequence(test),
      ...(train === undefined ? {} : { train: sequence(train) }),
      ...(repeated === undefined ? {} : { repeated: { ...repeated, mask: shared(repeated.mask) } }),
      ...(sentMap === undefined ? {} : { sentMap: { ...sentMap, bytes: shared(sentMap.bytes) } }),
    };
  });
}
