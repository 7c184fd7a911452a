/** Seconds since some fixed moment. Given from outside so that what is sampled, and when, can be tested without a real clock. */
export type Clock = () => number;

/** The clock of this thread, which never runs backwards. */
export const threadClock: Clock = () => performance.now() / 1000;

/** Something whose runs are timed. */
export interface TimedTask {
  /** What must be at hand before a run and is not part of it, such as an encoder that can be used once. */
  ready?(): void;
  run(): void;
}

export interface SampleRule {
  /** A sample lasts at least so long: runs are repeated until it does. */
  readonly shortestSeconds: number;
  /** No further run of a sample starts after so long, what is made ready counted: then it may be shorter than that. */
  readonly longestSeconds: number;
}

/** Runs between two looks at the clock last about this long at least, so that looking costs next to nothing. */
const LOOK_SECONDS = 50e-6;
const MOST_RUNS_PER_LOOK = 1024;

/**
 * One sample: mean seconds of a run, over as many runs as the rule asks for.
 * @returns above 0, also where the clock saw nothing pass
 */
export function takeSample(task: TimedTask, rule: SampleRule, clock: Clock): number {
  const began = clock();
  let runs = 0;
  let timed = 0;
  let block = 1;
  for (;;) {
    task.ready?.();
    const start = clock();
    for (let i = 0; i < block; i++) task.run();
    const end = clock();
    runs += block;
    timed += end - start;
    if (timed >= rule.shortestSeconds || end - began >= rule.longestSeconds) break;
    // What has to be made ready is made ready for one run.
    if (task.ready === undefined && end - start < LOOK_SECONDS)
      block = Math.min(MOST_RUNS_PER_LOOK, 2 * block);
  }
  return Math.max(timed / runs, Number.MIN_VALUE);
}
