/**
 * What the harness itself takes, against what its cells take: processor time of a plain loop over the cells, and of the same
 * cells by workers, with shared memory, hashes, cache and all. Then how much sooner two workers are done than one.
 *
 * HARNESS_MEGABYTES sets the size (4 unless said). Processor time of all threads, so that other programs on this machine count
 * for little; elapsed times are theirs to spoil. Nothing is asserted.
 */
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { parseCandidate } from '../src/coders/candidate.ts';
import { CacheKeys, codeHash } from '../src/harness/cache-key.ts';
import { CacheStore } from '../src/harness/cache-store.ts';
import { CachedExecutor } from '../src/harness/cached-executor.ts';
import { type Cell, listCells } from '../src/harness/cells.ts';
import type { CorpusData } from '../src/harness/corpus-data.ts';
import { runCell } from '../src/harness/run-cell.ts';
import { WorkerPool } from '../src/harness/worker-pool.ts';

const MEGABYTES = Number(process.env['HARNESS_MEGABYTES'] ?? 4);
const CANDIDATES = [
  'fixed',
  'huffman',
  'block-huffman:n=2',
  'golomb:m=64',
  'rice:k=6',
  'exp-golomb:k=6',
  'arith:order=0',
  'arith:order=1',
  'arith:order=2',
  'deflate',
  'deflate-huffman',
  'deflate-preset',
];
/** Symbols of a message: many, so that bits by message weigh as they do in a run. */
const MESSAGE = 1024;

const text = readFileSync(join(process.env['BITASSAY_DATASETS'] ?? '.datasets', 'moby.txt'));
const symbols = new Uint8Array(MEGABYTES * 1e6);
for (let at = 0; at < symbols.length; at += text.length)
  symbols.set(text.subarray(0, Math.min(text.length, symbols.length - at)), at);

function sequenceOf(part: Uint8Array): CorpusData['test'] {
  const count = Math.ceil(part.length / MESSAGE);
  const messageEnds = Uint32Array.from({ length: count }, (_, i) =>
    Math.min(part.length, (i + 1) * MESSAGE),
  );
  return { alphabetSize: 256, symbols: part, messageEnds };
}

const half = symbols.length / 2;
const test = sequenceOf(symbols.subarray(half));
const corpus: CorpusData = {
  name: 'text',
  key: 'text',
  sha256: '',
  symbolsAs: 'bytes',
  messagesAs: `every=${MESSAGE}`,
  lengths: 'link',
  alphabetSize: 256,
  sourceBytes: symbols.length,
  train: sequenceOf(symbols.subarray(0, half)),
  test,
  testFiles: [{ path: 'text', sha256: '', messageEnd: test.messageEnds.length }],
};
const candidates = CANDIDATES.map((name) => parseCandidate(name));
const { cells } = listCells(['text'], candidates, ['shipped'], ['message']);

interface Spent {
  /** Of the processor, all threads. */
  readonly seconds: number;
  readonly elapsed: number;
}

async function spent(work: () => Promise<void>): Promise<Spent> {
  const before = process.cpuUsage();
  const start = performance.now();
  await work();
  const { user, system } = process.cpuUsage(before);
  return { seconds: (user + system) / 1e6, elapsed: (performance.now() - start) / 1000 };
}

async function plainly(list: readonly Cell[]): Promise<void> {
  for (const cell of list) await runCell(cell, corpus, async () => {});
}

async function byWorkers(list: readonly Cell[], lanes: number): Promise<void> {
  const folder = mkdtempSync(join(tmpdir(), 'bitassay-bench-'));
  const pool = new WorkerPool([corpus], { lanes });
  const store = new CacheStore(folder);
  const executor = new CachedExecutor(pool, store, new CacheKeys(codeHash()), true);
  const control = { pause: async () => {}, interrupted: () => false };
  try {
    await Promise.all(list.map((cell) => executor.cellBits(cell, corpus, control)));
    await store.trim();
  } finally {
    await executor.close();
    rmSync(folder, { recursive: true, force: true });
  }
}

const percent = (share: number): string => `${(100 * share).toFixed(1)} %`;

console.log(`${cells.length} cells on ${MEGABYTES} MB, half of it to train on`);
// Each way in turns of its own: the code is compiled anew in each worker, as in a run.
const nothing = await spent(() => byWorkers([], 1));
const plain = await spent(() => plainly(cells));
const one = await spent(() => byWorkers(cells, 1));
const two = await spent(() => byWorkers(cells, 2));
console.log(
  `plain loop       ${plain.seconds.toFixed(2)} s of processor time, ${plain.elapsed.toFixed(2)} s elapsed`,
);
console.log(`one worker       ${one.seconds.toFixed(2)} s, ${one.elapsed.toFixed(2)} s elapsed`);
console.log(`two workers      ${two.seconds.toFixed(2)} s, ${two.elapsed.toFixed(2)} s elapsed`);
console.log(`hashes of code   ${nothing.seconds.toFixed(2)} s, whatever the size`);
console.log(
  `overhead         ${percent(one.seconds / plain.seconds - 1)} of processor time with one worker, ${percent(two.seconds / plain.seconds - 1)} with two`,
);
console.log(`sooner by        ${(one.elapsed / two.elapsed).toFixed(2)} times with two workers`);
