/** What a pool of workers must hold off: cells that crash, hang, end their process or eat memory, each one failed cell. */
import { describe, expect, it } from 'vitest';
import { type Candidate, parseCandidate, parseCandidateWith } from '../../src/coders/candidate.ts';
import type { CoderEntry } from '../../src/coders/contract.ts';
import { EnvironmentError } from '../../src/errors/errors.ts';
import type { CellBudget } from '../../src/harness/budget.ts';
import type { CorpusData } from '../../src/harness/corpus-data.ts';
import { type RunRequest, runAll } from '../../src/harness/run-all.ts';
import type { RunRecord } from '../../src/harness/run-record.ts';
import { WorkerPool } from '../../src/harness/worker-pool.ts';
import { sliceMessages } from '../../src/symbols/sequence.ts';
import { builtFile } from './built.ts';
import { coders } from './misbehaving-coders.mjs';

const module = new URL('./misbehaving-coders.mjs', import.meta.url).href;
const entry = builtFile('harness/worker.js');

const symbols = Uint8Array.from({ length: 6000 }, (_, i) => (i * i) % 251);
const corpus: CorpusData = {
  name: 'a',
  key: 'a',
  sha256: '',
  symbolsAs: 'bytes',
  messagesAs: 'every=100',
  lengths: 'known',
  alphabetSize: 256,
  sourceBytes: symbols.length,
  test: {
    alphabetSize: 256,
    symbols,
    messageEnds: Uint32Array.from({ length: 60 }, (_, i) => (i + 1) * 100),
  },
  testFiles: [{ path: 'a', sha256: '', messageEnd: 60 }],
};

const misbehaving = (text: string): Candidate =>
  parseCandidateWith(`misbehaving-${text}`, coders as unknown as CoderEntry[]);

function requestOf(candidates: readonly Candidate[]): RunRequest {
  return {
    title: 'pool',
    corpora: [corpus],
    candidates,
    policies: ['learned'],
    resets: ['message'],
    align: 8,
    split: '',
  };
}

async function runInPool(
  candidates: readonly Candidate[],
  options: { budget?: Partial<CellBudget>; lanes?: number; repeats?: number } = {},
): Promise<RunRecord> {
  const { repeats } = options;
  const request: RunRequest = {
    ...requestOf(candidates),
    ...(repeats === undefined ? {} : { timing: { repeats } }),
  };
  const pool = new WorkerPool(request.corpora, {
    entry,
    modules: [module],
    lanes: options.lanes ?? 2,
    budget: { seconds: 60, memoryBytes: 1e9, ...options.budget },
  });
  try {
    return (await runAll(request, {}, pool)).record;
  } finally {
    await pool.close();
  }
}

/** Runs coders that misbehave between two that do not: their failures, once the others are seen to be right. */
async function failuresOf(
  texts: readonly string[],
  budget: Partial<CellBudget> = {},
): Promise<(string | undefined)[]> {
  const candidates = [parseCandidate('fixed'), ...texts.map(misbehaving), misbehaving('encode')];
  const { cells } = await runInPool(candidates, { budget });
  expect(cells.map(({ candidate }) => candidate)).toEqual(candidates.map(({ id }) => id));
  const [first, last] = [cells.shift()!, cells.pop()!];
  // Bytes as they are, 8 bits each.
  expect(first.rate).toBe(8);
  expect(last.rate).toBe(8);
  for (const cell of cells) {
    expect(cell.verified).toBe(false);
    expect(cell.rate).toBeUndefined();
  }
  return cells.map(({ failure }) => failure);
}

async function failureOf(text: string, budget: Partial<CellBudget>): Promise<string> {
  return (await failuresOf([text], budget))[0]!;
}

describe('a cell in a worker', () => {
  it('that throws something, or ends its process, fails with its reason, and the others are right', async () => {
    const reasons: [string, RegExp][] = [
      ['encode:does=throw_error', /^TypeError: a table is missing$/],
      ['decode:does=throw_nothing', /^threw undefined$/],
      ['encode:does=throw_unshowable', /nobody asks where I come from/],
      ['encode:does=exit', /^ended its process with code 7, while it encoded$/],
      ['decode:does=exit', /^ended its process with code 7, while it decoded$/],
      ['encode:does=uncloneable', /could not be cloned/],
    ];
    const failures = await failuresOf(reasons.map(([text]) => text));
    reasons.forEach(([, reason], i) => {
      expect(failures[i]).toMatch(reason);
    });
  });

  it('that hangs is stopped when its time is over', async () => {
    expect(await failureOf('decode:does=hang', { seconds: 1 })).toBe(
      'took longer than budget.cell_seconds, 1 s, while it decoded',
    );
  });

  it('whose heap outgrows the bound is stopped', async () => {
    expect(await failureOf('encode:does=heap', { memoryBytes: 100e6 })).toBe(
      'took more memory than budget.cell_memory, 100 MB, while it encoded',
    );
  });

  it('whose typed arrays outgrow the bound is stopped in the middle of a step', async () => {
    expect(await failureOf('encode:does=arrays', { memoryBytes: 200e6 })).toMatch(
      /^took more memory than budget.cell_memory, 200 MB/,
    );
  });

  it('whose typed arrays outgrow the bound by little is stopped after its step', async () => {
    expect(await failureOf('encode:does=arrays_between_steps', { memoryBytes: 80e6 })).toBe(
      'took more memory than budget.cell_memory, 80 MB',
    );
  });

  it('is timed after all are coded, and fails where it does not work again', async () => {
    const later = misbehaving('encode:does=throw_later');
    const candidates = [parseCandidate('fixed'), later, parseCandidate('rice:k=3')];
    const { cells } = await runInPool(candidates, { lanes: 1, repeats: 1 });
    expect(cells.map(({ encode }) => encode?.seconds.length)).toEqual([1, undefined, 1]);
    expect(cells.map(({ verified }) => verified)).toEqual([true, false, true]);
    expect(cells[1].failure).toBe('when it was timed: TypeError: once is enough');
  });

  it('that leaves an error behind takes no other cell with it', async () => {
    const stray = misbehaving('encode:does=stray_error');
    const { cells } = await runInPool([stray, parseCandidate('fixed')], { lanes: 1 });
    expect(cells[1].rate).toBe(8);
  });
});

describe('workers that do not start', () => {
  it('end the run with what they say, not cell by cell', async () => {
    const broken = new URL('./broken-worker.mjs', import.meta.url);
    const pool = new WorkerPool([corpus], { entry: broken, lanes: 1 });
    try {
      const run = runAll(requestOf([parseCandidate('fixed')]), {}, pool);
      await expect(run).rejects.toThrow(EnvironmentError);
      await expect(run).rejects.toMatchObject({ where: { got: 'Error: no worker today' } });
    } finally {
      await pool.close();
    }
  });

  it('are missed before any work is done', () => {
    const missing = new URL('./missing-worker.mjs', import.meta.url);
    expect(() => new WorkerPool([corpus], { entry: missing })).toThrow(/entry of its workers/);
  });
});

describe('a run in workers', () => {
  const candidates = ['fixed', 'huffman', 'arith:order=0', 'arith:order=1', 'deflate'];

  it('gives the record of a run on this thread, with one worker and with two', async () => {
    const half = sliceMessages(corpus.test, 0, 20);
    const trained: RunRequest = {
      ...requestOf(candidates.map((text) => parseCandidate(text))),
      corpora: [
        {
          ...corpus,
          train: half,
          test: half,
          testFiles: [{ ...corpus.testFiles[0], messageEnd: 20 }],
        },
      ],
      policies: ['shipped', 'sent', 'learned'],
      resets: ['message', 'never'],
      ageing: true,
    };
    const here = await runAll(trained);
    for (const lanes of [1, 2]) {
      const pool = new WorkerPool(trained.corpora, { entry, lanes });
      try {
        const there = await runAll(trained, {}, pool);
        expect(there.record).toEqual(here.record);
        expect(there.messages).toEqual(here.messages);
      } finally {
        await pool.close();
      }
    }
    expect(here.record.ageing).toHaveLength(1);
  });
});
