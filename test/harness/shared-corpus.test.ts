import { describe, expect, it } from 'vitest';
import type { CorpusData } from '../../src/harness/corpus-data.ts';
import { shareCorpora } from '../../src/harness/shared-corpus.ts';

const all = Uint16Array.from({ length: 100 }, (_, i) => (i * 517) % 1000);

function corpusOf(key: string, from: number, to: number): CorpusData {
  const sequence = (a: number, b: number) => ({
    alphabetSize: 1000,
    symbols: all.subarray(a, b),
    messageEnds: Uint32Array.of(10, b - a),
  });
  return {
    name: 'a',
    key,
    sha256: '',
    symbolsAs: 'u16le',
    messagesAs: 'whole',
    lengths: 'link',
    alphabetSize: 1000,
    sourceBytes: 200,
    train: sequence(0, from),
    test: sequence(from, to),
    testFiles: [],
    repeated: { share: 0.5, mask: Uint8Array.of(1, 0) },
    sentMap: { bytes: Uint8Array.of(7, 8, 9), bits: 20 },
  };
}

describe('corpora in shared memory', () => {
  const own = [corpusOf('a', 40, 100), corpusOf('a+fold=2', 60, 90)];
  const shared = shareCorpora(own);

  it('say the same', () => {
    expect(shared).toEqual(own);
  });

  it('lie in shared memory, arrays of one buffer in one', () => {
    const arrays = shared.flatMap((corpus) => [
      corpus.train!.symbols,
      corpus.test.symbols,
      corpus.test.messageEnds,
      corpus.repeated!.mask,
      corpus.sentMap!.bytes,
    ]);
    for (const array of arrays) expect(array.buffer).toBeInstanceOf(SharedArrayBuffer);
    const [first, second] = shared;
    expect(first.test.symbols.buffer).toBe(first.train!.symbols.buffer);
    expect(second.test.symbols.buffer).toBe(first.test.symbols.buffer);
    expect(first.test.symbols.buffer.byteLength).toBe(all.byteLength);
  });

  it('stay where they are when shared again, and cross to another thread without a copy', () => {
    const [again] = shareCorpora(shared);
    expect(again.test.symbols.buffer).toBe(shared[0].test.symbols.buffer);
    const crossed = structuredClone(shared[0]);
    crossed.test.symbols[0] = 999;
    expect(shared[0].test.symbols[0]).toBe(999);
  });
});
