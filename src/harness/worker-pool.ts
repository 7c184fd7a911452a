import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import type { Piscina } from 'piscina';
import { EnvironmentError, LimitError } from '../errors/errors.ts';
import type { Ageing } from './ageing.ts';
import { type CellBudget, USUAL_BUDGET, usualLanes } from './budget.ts';
import type { Cell } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import type { FloorOptions } from './corpus-floors.ts';
import type { DamagePlan } from './damage-experiment.ts';
import type { CellDamage } from './damage-schema.ts';
import type { Control, Executor } from './executor.ts';
import type { FloorPieces } from './floor-pieces.ts';
import { type JobBounds, JobWatch } from './job-watch.ts';
import { Lanes } from './lanes.ts';
import { memoryReason } from './memory-guard.ts';
import { Interrupted } from './pause.ts';
import type { CellBits, CellFailure } from './run-cell.ts';
import { shareCorpora } from './shared-corpus.ts';
import { type CellTimes, longestEndSeconds, type TimingOptions } from './time-cell.ts';
import {
  type Answer,
  type Job,
  type PostedJob,
  plainCell,
  thrownText,
  type WorkerSetup,
} from './worker-job.ts';

export interface WorkerPoolOptions {
  readonly budget?: CellBudget;
  /** Workers; as many as suit the machine when absent. */
  readonly lanes?: number;
  /** No more than so many, where there is not work for more. */
  readonly mostLanes?: number;
  /** Addresses of modules whose `coders` are coder entries besides the registry's. */
  readonly modules?: readonly string[];
  /** The worker's entry; the one beside this file when absent. */
  readonly entry?: URL;
}

/** Figures about cells are made in several passes over their data, and may take so many times what a cell may. */
const FIGURE_BUDGETS = 10;
/** What counting entropies and running the coders of a floor may take: they are no cells, and bound themselves. */
const FLOOR_BYTES = 8e9;

/** The entry of workers beside this file; undefined in the sources, which Node does not run in a worker. */
export function workerEntry(): URL | undefined {
  if (import.meta.url.endsWith('.ts')) return undefined;
  return new URL('worker.js', import.meta.url);
}

/**
 * The pool asks for its worker by `require` first. Where the engine takes modules that way, a worker that is ended while one is
 * being linked brings the whole process down (seen with Node 20.20: "IsGraphAsync must be used on an instantiated module"); refused,
 * the pool imports it, which can be ended at any time.
 */
const NO_REQUIRED_MODULES = '--no-experimental-require-module';
const ASYNCHRONOUS_LOADING = process.allowedNodeEnvironmentFlags.has(NO_REQUIRED_MODULES)
  ? [NO_REQUIRED_MODULES]
  : [];

/**
 * Does the work in a pool of worker threads, so that a cell that crashes, hangs, ends its process or exceeds its budget is
 * one failed cell, and the others are right. What it cannot hold off: native code that ends the whole process, or a machine
 * whose memory is gone before the watch sees it.
 */
export class WorkerPool implements Executor {
  readonly lanes: number;
  readonly #lanes: Lanes;
  readonly #watch = new JobWatch();
  readonly #budget: CellBudget;
  readonly #entry: URL;
  readonly #setup: WorkerSetup;
  #pool: Promise<Piscina> | undefined;

  /**
   * Workers for these corpora; those that do not lie in shared memory are copied there. They are started by the first job.
   * @throws EnvironmentError where the entry of workers is missing
   */
  constructor(corpora: readonly CorpusData[], options: WorkerPoolOptions = {}) {
    const { budget = USUAL_BUDGET, modules = [], mostLanes = Number.POSITIVE_INFINITY } = options;
    const lanes = Math.min(mostLanes, options.lanes ?? usualLanes(corpora, budget));
    const entry = options.entry ?? workerEntry();
    if (entry === undefined || !existsSync(entry)) {
      throw new EnvironmentError('a part of this program is missing: the entry of its workers', {
        file: entry === undefined ? 'worker.js' : fileURLToPath(entry),
        advice: 'Install the program anew.',
      });
    }
    this.lanes = lanes;
    this.#lanes = new Lanes(lanes);
    this.#budget = budget;
    this.#entry = entry;
    this.#setup = {
      corpora: shareCorpora(corpora),
      modules,
      memoryBytes: budget.memoryBytes,
    };
  }

  async #start(): Promise<Piscina> {
    const { Piscina } = await import('piscina');
    const pool = new Piscina({
      filename: fileURLToPath(this.#entry),
      minThreads: this.lanes,
      maxThreads: this.lanes,
      idleTimeout: Number.POSITIVE_INFINITY,
      concurrentTasksPerWorker: 1,
      execArgv: ASYNCHRONOUS_LOADING,
      recordTiming: false,
      workerData: this.#setup,
      resourceLimits: {
        maxOldGenerationSizeMb: Math.ceil(this.#budget.memoryBytes / 2 ** 20) + 64,
      },
    });
    // What ends a worker that has no job, such as a timer that a coder left behind, is no cell's failure, and another takes its
    // place; but a job that waits for a worker which does not come up would wait for ever.
    pool.on('error', (error: unknown) => this.#watch.endUnbegun(thrownText(error)));
    return pool;
  }

  async cellBits(
    cell: Cell,
    corpus: CorpusData,
    control: Control,
  ): Promise<CellBits | CellFailure> {
    const job: Job = { kind: 'bits', cell: plainCell(cell) };
    const run = () => this.#do<'bits'>(job, this.#budget, control);
    let answer = await this.#lanes.run(run);
    // Which of several cells took all the memory cannot be seen from outside: each is run again, alone.
    if (answer === 'suspect') answer = await this.#lanes.runAlone(run);
    if (answer === 'suspect') return { cell, failure: memoryReason(this.#budget.memoryBytes) };
    if ('failure' in answer) return { cell, failure: answer.failure };
    return { cell, messageEnds: corpus.test.messageEnds, ...answer.result, units: [] };
  }

  async cellTimes(
    cell: Cell,
    _corpus: CorpusData,
    options: TimingOptions,
    control: Control,
  ): Promise<CellTimes | undefined | CellFailure> {
    const job: Job = { kind: 'times', cell: plainCell(cell), options };
    const seconds = 2 * this.#budget.seconds + 8 * longestEndSeconds(options.repeats);
    const answer = await this.#lanes.runAlone(() =>
      this.#do<'times'>(job, { ...this.#budget, seconds }, control),
    );
    if (answer === 'suspect') return { cell, failure: memoryReason(this.#budget.memoryBytes) };
    if ('failure' in answer) return { cell, failure: `when it was timed: ${answer.failure}` };
    return answer.result;
  }

  async floorPieces(
    corpus: CorpusData,
    options: FloorOptions,
    pieces: FloorPieces,
    control: Control,
  ): Promise<void> {
    const job: Job = { kind: 'floors', dataKey: corpus.key, options, known: pieces.asMap() };
    const bounds = {
      seconds: Number.POSITIVE_INFINITY,
      memoryBytes: Math.max(FLOOR_BYTES, this.#budget.memoryBytes),
    };
    const run = () => this.#do<'floors'>(job, bounds, control);
    let answer = await this.#lanes.run(run);
    if (answer === 'suspect') answer = await this.#lanes.runAlone(run);
    const failure = answer === 'suspect' ? memoryReason(this.#budget.memoryBytes) : undefined;
    if (failure !== undefined || answer === 'suspect' || 'failure' in answer) {
      throw new LimitError(`the entropies of ${corpus.name} could not be counted`, {
        got: failure ?? (answer as { failure: string }).failure,
        advice: 'Take a part of the data, or raise budget.cell_memory.',
      });
    }
    pieces.add(answer.result);
    if (answer.interrupted) throw new Interrupted();
  }

  async ageing(
    cell: Cell,
    _corpus: CorpusData,
    messageEnds: Uint32Array,
    control: Control,
  ): Promise<Ageing | undefined> {
    const job: Job = { kind: 'ageing', cell: plainCell(cell), messageEnds };
    const seconds = FIGURE_BUDGETS * this.#budget.seconds;
    const answer = await this.#lanes.run(() =>
      this.#do<'ageing'>(job, { ...this.#budget, seconds }, control),
    );
    // A figure beside the cells: where it meets a bound its lines are left out.
    return answer === 'suspect' || 'failure' in answer ? undefined : answer.result;
  }

  async damage(
    cell: Cell,
    _corpus: CorpusData,
    plan: DamagePlan,
    control: Control,
  ): Promise<readonly CellDamage[] | CellFailure> {
    const job: Job = { kind: 'damage', cell: plainCell(cell), plan };
    const seconds = FIGURE_BUDGETS * this.#budget.seconds;
    const answer = await this.#lanes.run(() =>
      this.#do<'damage'>(job, { ...this.#budget, seconds }, control),
    );
    if (answer === 'suspect') return { cell, failure: memoryReason(this.#budget.memoryBytes) };
    if ('failure' in answer) return { cell, failure: answer.failure };
    if (answer.interrupted) throw new Interrupted();
    return answer.result;
  }

  async close(): Promise<void> {
    this.#watch.close();
    await (await this.#pool)?.destroy();
  }

  async #do<K extends Job['kind']>(
    job: Extract<Job, { kind: K }>,
    bounds: JobBounds,
    control: Control,
  ): Promise<Answer<K> | 'suspect'> {
    if (control.interrupted()) throw new Interrupted();
    control.begun?.();
    this.#pool ??= this.#start();
    const pool = await this.#pool;
    // A worker can end before it begins a job, by what an earlier one left behind; a second one that does so ends by itself.
    for (let tries = 1; ; tries++) {
      const watched = this.#watch.begin(bounds, control);
      const posted: PostedJob = { job, board: watched.board.numbers };
      try {
        return (await pool.run(posted, { signal: watched.signal })) as Answer<K>;
      } catch (error) {
        if (watched.isSuspect) return 'suspect';
        const failure = watched.reason ?? endText(error, this.#budget, watched.board.place);
        if (watched.board.step > 0) return { failure };
        if (tries > 1) throw new EnvironmentError('workers do not start', { got: failure });
      } finally {
        this.#watch.end(watched);
      }
    }
  }
}

/** Why a worker came to its end, in words that follow the name of a cell. */
function endText(error: unknown, { memoryBytes }: CellBudget, place: string): string {
  if (!(error instanceof Error)) return thrownText(error);
  if (Reflect.get(error, 'code') === 'ERR_WORKER_OUT_OF_MEMORY')
    return memoryReason(memoryBytes, place);
  const exit = /worker exited with code: (-?\d+)/.exec(error.message);
  if (exit !== null) return `ended its process with code ${exit[1]}${place}`;
  return `${thrownText(error)}${place}`;
}
