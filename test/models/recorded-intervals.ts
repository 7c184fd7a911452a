import { checkInterval, type IntervalSink } from '../../src/models/interval.ts';

/** Keeps what a model hands over, and holds it to its promises. */
export class RecordedIntervals implements IntervalSink {
  readonly intervals: { low: number; frequency: number; total: number }[] = [];

  put(low: number, frequency: number, total: number): void {
    checkInterval(low, frequency, total);
    if (frequency === total) throw new Error('a certain interval was handed over');
    this.intervals.push({ low, frequency, total });
  }

  /** `frequency/total` of each, which does not depend on how a context orders its symbols. */
  get ratios(): string[] {
    return this.intervals.map(({ frequency, total }) => `${frequency}/${total}`);
  }

  get bits(): number {
    return this.intervals.reduce(
      (sum, { frequency, total }) => sum + Math.log2(total) - Math.log2(frequency),
      0,
    );
  }
}
