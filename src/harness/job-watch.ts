import type { Control } from './executor.ts';
import { JobBoard } from './worker-job.ts';

/** How often jobs are looked at. */
const LOOK_MILLISECONDS = 25;
/** A worker that has not begun its job after so long never will. */
const START_SECONDS = 60;
/** What the process may grow by besides its cells: garbage, results, the heaps of workers. */
const SLACK_BYTES = 384e6;

/** What a job may take. */
export interface JobBounds {
  /** From when a worker begins it. */
  readonly seconds: number;
  readonly memoryBytes: number;
}

/** A job in a worker, as it looks from outside. */
export interface WatchedJob {
  readonly board: JobBoard;
  readonly signal: AbortSignal;
  /** Why it was stopped from here; undefined where it was not. */
  readonly reason: string | undefined;
  /** Stopped with others because together they took too much memory. */
  readonly isSuspect: boolean;
}

class Watched implements WatchedJob {
  readonly board = new JobBoard();
  readonly bounds: JobBounds;
  readonly control: Control;
  readonly posted = performance.now();
  began: number | undefined;
  reason: string | undefined;
  isSuspect = false;
  readonly #abort = new AbortController();

  constructor(bounds: JobBounds, control: Control) {
    this.bounds = bounds;
    this.control = control;
  }

  get signal(): AbortSignal {
    return this.#abort.signal;
  }

  /** The reason is set first: what ends the worker must not be taken for it. */
  end(reason: string | undefined): void {
    this.reason = reason;
    this.isSuspect = reason === undefined;
    this.#abort.abort();
  }
}

/**
 * Looks at the jobs that are under way, from the thread that none of them can hold up: ends one that takes too long, passes an
 * interrupt on, and ends them all when the process grows by more than they may take together. Typed arrays lie outside of
 * any bound that the engine keeps for a thread, so that the growth of the process is all there is to see while a step goes on.
 */
export class JobWatch {
  readonly #jobs = new Set<Watched>();
  #timer: NodeJS.Timeout | undefined;
  #idleBytes = 0;
  #mostBytes = 0;

  begin(bounds: JobBounds, control: Control): WatchedJob {
    if (this.#jobs.size === 0) {
      this.#idleBytes = process.memoryUsage.rss();
      this.#mostBytes = 0;
    }
    const job = new Watched(bounds, control);
    this.#jobs.add(job);
    let bytes = 0;
    for (const { bounds } of this.#jobs) bytes += bounds.memoryBytes;
    // A worker whose job has ended still holds what was not collected.
    this.#mostBytes = Math.max(this.#mostBytes, bytes);
    this.#timer ??= setInterval(() => this.#look(), LOOK_MILLISECONDS);
    return job;
  }

  end(job: WatchedJob): void {
    this.#jobs.delete(job as Watched);
    if (this.#jobs.size === 0) this.close();
  }

  /** Ends the jobs that no worker has begun. */
  endUnbegun(reason: string): void {
    for (const job of this.#jobs) if (job.board.step === 0) job.end(reason);
  }

  close(): void {
    clearInterval(this.#timer);
    this.#timer = undefined;
  }

  #look(): void {
    const now = performance.now();
    for (const job of this.#jobs) {
      if (job.control.interrupted()) job.board.stop();
      if (job.began === undefined) {
        if (job.board.step > 0) job.began = now;
        else if (now - job.posted > 1000 * START_SECONDS) job.end('could not be begun by a worker');
      } else if (now - job.began > 1000 * job.bounds.seconds) {
        job.end(`took longer than budget.cell_seconds, ${job.bounds.seconds} s${job.board.place}`);
      }
    }
    if (process.memoryUsage.rss() - this.#idleBytes <= this.#mostBytes + SLACK_BYTES) return;
    for (const job of this.#jobs) job.end(undefined);
  }
}
