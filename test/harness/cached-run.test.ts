/** What a second run takes from the first: the same figures, of the very same cells, and nothing else. */
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import { CacheKeys } from '../../src/harness/cache-key.ts';
import { listCells } from '../../src/harness/cells.ts';
import type { CorpusData } from '../../src/harness/corpus-data.ts';
import type { RunRequest } from '../../src/harness/run-all.ts';
import { runWith } from '../../src/harness/run-with.ts';
import { type SymbolSequence, sliceMessages } from '../../src/symbols/sequence.ts';

let cache: string;
beforeEach(() => {
  cache = mkdtempSync(join(tmpdir(), 'bitassay-cached-'));
});
afterEach(() => rmSync(cache, { recursive: true, force: true }));

const whole: SymbolSequence = {
  alphabetSize: 256,
  symbols: Uint8Array.from({ length: 3000 }, (_, i) => (i * i * 7 + (i >> 5)) % 23),
  messageEnds: Uint32Array.from({ length: 60 }, (_, i) => (i + 1) * 50),
};

const corpus: CorpusData = {
  name: 'a',
  key: 'a',
  sha256: '',
  symbolsAs: 'bytes',
  messagesAs: 'every=50',
  lengths: 'link',
  alphabetSize: 256,
  sourceBytes: 3000,
  train: sliceMessages(whole, 0, 30),
  test: sliceMessages(whole, 30, 60),
  testFiles: [{ path: 'a', sha256: '', messageEnd: 30 }],
};

function requestOf(texts: readonly string[], data: CorpusData = corpus): RunRequest {
  return {
    title: 'cached',
    corpora: [data],
    candidates: texts.map((text) => parseCandidate(text)),
    policies: ['shipped', 'learned'],
    resets: ['message', 'never'],
    align: 8,
    split: '',
    ageing: true,
  };
}

const texts = ['fixed', 'huffman', 'arith:order=1', 'deflate'];

describe('a run with a cache', () => {
  it('gives the same record from the cache as without one', async () => {
    const without = await runWith(requestOf(texts), {}, { cache: false });
    const first = await runWith(requestOf(texts), {}, { cache });
    const second = await runWith(requestOf(texts), {}, { cache });
    expect(without.cellsTaken).toBe(0);
    expect(first.cellsTaken).toBe(0);
    expect(second.cellsTaken).toBe(first.record.cells.length);
    expect(first.record).toEqual(without.record);
    expect(second.record).toEqual(without.record);
    expect(second.messages).toEqual(without.messages);
    expect(second.record.ageing).toHaveLength(1);
  });

  it('runs only the cells of a candidate that was changed', async () => {
    await runWith(requestOf(texts), {}, { cache });
    const changed = await runWith(
      requestOf([...texts.slice(0, 3), 'arith:order=2']),
      {},
      { cache },
    );
    const own = changed.record.cells.filter((cell) => cell.candidate === 'arith:order=2').length;
    expect(own).toBeGreaterThan(0);
    expect(changed.cellsTaken).toBe(changed.record.cells.length - own);
    expect(changed.record).toEqual(
      (await runWith(requestOf([...texts.slice(0, 3), 'arith:order=2']), {}, { cache: false }))
        .record,
    );
  });

  it('takes nothing where asked for a fresh run, and leaves what it found', async () => {
    await runWith(requestOf(texts), {}, { cache });
    expect((await runWith(requestOf(texts), {}, { cache, fresh: true })).cellsTaken).toBe(0);
    const again = await runWith(requestOf(texts), {}, { cache });
    expect(again.cellsTaken).toBe(again.record.cells.length);
  });

  it('fills messages as before', async () => {
    const units: CorpusData = { ...corpus, fill: { bytes: 64, unitSymbols: 50 } };
    const request = {
      ...requestOf(['huffman', 'arith:order=0'], units),
      resets: ['message'] as const,
    };
    const first = await runWith(request, {}, { cache });
    const second = await runWith(request, {}, { cache });
    expect(second.cellsTaken).toBe(second.record.cells.length);
    expect(second.record).toEqual(first.record);
  });

  it('keeps on after it was interrupted', async () => {
    let cells = 0;
    const hooks = {
      progress: ({ cellsDone }: { cellsDone: number }) => {
        cells = cellsDone;
      },
      interrupted: () => cells >= 3,
    };
    const broken = await runWith(requestOf(texts), hooks, { cache });
    expect(broken.record.partial).toBe(true);
    // Cells in hand when the third was done still end, and are kept.
    const kept = broken.record.cells.length;
    expect(kept).toBeGreaterThanOrEqual(3);
    const resumed = await runWith(requestOf(texts), {}, { cache });
    expect(resumed.cellsTaken).toBe(kept);
    expect(resumed.record.cells.length).toBeGreaterThan(kept);
    expect(resumed.record).toEqual((await runWith(requestOf(texts), {}, { cache: false })).record);
  });
});

describe('the key of a cell', () => {
  const keyIn = (
    keys: CacheKeys,
    data: CorpusData,
    text: string,
    policy: 'shipped' | 'learned',
  ) => {
    const { cells } = listCells(['a'], [parseCandidate(text)], [policy], ['message']);
    return keys.ofCell('bits', cells[0], data);
  };
  const keyOf = (data: CorpusData, text = 'huffman', policy: 'shipped' | 'learned' = 'shipped') =>
    keyIn(new CacheKeys('code'), data, text, policy);

  const { test, train } = corpus;
  const oneSymbol = { ...test, symbols: test.symbols.slice() };
  oneSymbol.symbols[700] ^= 1;
  const oneTrained = { ...train!, symbols: train!.symbols.slice() };
  oneTrained.symbols[0] ^= 1;
  const oneEnd = {
    ...test,
    messageEnds: test.messageEnds.map((end, i) => (i === 4 ? end + 1 : end)),
  };

  it('differs with everything that the bits depend on', () => {
    const keys = [
      keyOf(corpus),
      keyOf({ ...corpus, test: oneSymbol }),
      keyOf({ ...corpus, test: oneEnd }),
      keyOf({ ...corpus, train: oneTrained }),
      keyOf({ ...corpus, lengths: 'known' }),
      keyOf({ ...corpus, fill: { bytes: 64, unitSymbols: 50 } }),
      keyOf({ ...corpus, record: { bytes: 2, fields: [] } }),
      keyOf({ ...corpus, fields: { a: 'u8' } }),
      keyOf({ ...corpus, sentMap: { bytes: Uint8Array.of(1), bits: 3 } }),
      keyOf({ ...corpus, sentMap: { bytes: Uint8Array.of(2), bits: 3 } }),
      keyOf({ ...corpus, testFiles: [{ path: 'a', sha256: '', messageEnd: 29 }] }),
      keyOf(corpus, 'arith:order=1'),
      keyOf(corpus, 'arith:order=1', 'learned'),
      keyIn(new CacheKeys('other code'), corpus, 'huffman', 'shipped'),
    ];
    expect(new Set(keys).size).toBe(keys.length);
  });

  it('does not depend on names, nor on a train part that is not used', () => {
    const renamed = {
      ...corpus,
      name: 'b',
      key: 'b',
      testFiles: [{ path: 'x', sha256: 'y', messageEnd: 30 }],
    };
    expect(keyOf(renamed)).toBe(keyOf(corpus));
    const retrained = { ...corpus, train: oneTrained };
    expect(keyOf(retrained, 'arith:order=1', 'learned')).toBe(
      keyOf(corpus, 'arith:order=1', 'learned'),
    );
  });
});
