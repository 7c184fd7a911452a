import { workerData } from 'node:worker_threads';
import type { CoderEntry } from '../coders/contract.ts';
import { BitassayError, BugError } from '../errors/errors.ts';
import { ageingOf } from './ageing.ts';
import type { CorpusData } from './corpus-data.ts';
import { CorpusFloors } from './corpus-floors.ts';
import { damageCell } from './damage-cell.ts';
import { FloorPieces } from './floor-pieces.ts';
import { MemoryGuard } from './memory-guard.ts';
import { Interrupted } from './pause.ts';
import { placeOf, runCell } from './run-cell.ts';
import { timeCell } from './time-cell.ts';
import {
  type Answer,
  cellOf,
  type Job,
  JobBoard,
  type PostedJob,
  thrownText,
  type WorkerSetup,
} from './worker-job.ts';

/** The entry of a worker thread: each call does one job. Nothing but plain data comes in or goes out. */

const setup = workerData as WorkerSetup;
const corpora = new Map(setup.corpora.map((corpus) => [corpus.key, corpus]));
const guard = new MemoryGuard(setup.memoryBytes);
let entries: Promise<CoderEntry[]> | undefined;

function corpusOf(key: string): CorpusData {
  const corpus = corpora.get(key);
  if (corpus === undefined) throw new BugError(`a worker has no data ${key}`);
  return corpus;
}

async function loadEntries(): Promise<CoderEntry[]> {
  const modules = (await Promise.all(setup.modules.map((url) => import(url)))) as {
    coders: CoderEntry[];
  }[];
  return modules.flatMap(({ coders }) => coders);
}

async function resultOf(job: Job, board: JobBoard): Promise<Answer<Job['kind']>> {
  if (job.kind === 'floors') {
    const pieces = new FloorPieces(job.known);
    const floors = new CorpusFloors(corpusOf(job.dataKey), new Map(), pieces);
    try {
      await floors.build(job.options, async () => {
        if (board.isStopped) throw new Interrupted();
      });
    } catch (error) {
      if (!(error instanceof Interrupted)) throw error;
      return { result: pieces.asMap(), interrupted: true };
    }
    return { result: pieces.asMap() };
  }
  entries ??= loadEntries();
  const cell = cellOf(job.cell, await entries);
  const corpus = corpusOf(cell.dataKey);
  if (job.kind === 'times') return { result: timeCell(cell, corpus, job.options) };
  if (job.kind === 'ageing') return { result: ageingOf(cell, corpus, job.messageEnds) };
  if (job.kind === 'damage') {
    try {
      const result = await damageCell(cell, corpus, job.plan, async () => {
        guard.check();
        if (board.isStopped) throw new Interrupted();
      });
      return { result };
    } catch (error) {
      if (error instanceof Interrupted) return { result: [], interrupted: true };
      if (!(error instanceof BitassayError)) throw error;
      return { failure: `${error.message}${placeOf(error)}` };
    }
  }
  const bits = await runCell(cell, corpus, async (step) => {
    board.enter(step);
    guard.check();
  });
  if ('failure' in bits) return { failure: bits.failure };
  const { cell: _, units: __, messageEnds, ...rest } = bits;
  return { result: corpus.fill === undefined ? rest : { ...rest, messageEnds } };
}

/** Does a job; whatever it throws becomes a failure with its words. */
export default async function work({ job, board }: PostedJob): Promise<Answer<Job['kind']>> {
  const shown = new JobBoard(board);
  shown.enter('begin');
  try {
    // A result that cannot cross is found out here, where it is a failure of this job and not of the worker.
    return structuredClone(await resultOf(job, shown));
  } catch (error) {
    return { failure: thrownText(error) };
  }
}
