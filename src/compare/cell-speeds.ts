import type { CellRecord, RunRecord } from '../harness/run-record.ts';
import { compareSpeeds, type SpeedComparison } from '../statistics/speed-verdict.ts';

type Samples = Pick<NonNullable<CellRecord['encode']>, 'seconds' | 'pacer_seconds' | 'unsteady'>;

/** A cell in its run, or what a baseline keeps of it. */
export interface TimedCell {
  readonly environment: Pick<RunRecord['environment'], 'class'>;
  readonly cell: {
    readonly id: string;
    readonly timed?: Pick<NonNullable<CellRecord['timed']>, 'pacer' | 'symbol_count'> | undefined;
    readonly encode?: Samples | undefined;
    readonly decode?: Samples | undefined;
  };
}

/**
 * Whether a cell is slower than another, or than itself in an earlier run, at one end: 99 % interval of the ratio of their
 * speeds, held against 1.03 (see {@link compareSpeeds}).
 * @returns in words why their speeds cannot be compared, where they cannot
 */
export function compareCellSpeeds(
  first: TimedCell,
  second: TimedCell,
  end: 'encode' | 'decode',
): SpeedComparison | string {
  const [a, b] = [first.cell, second.cell];
  const [aTimes, bTimes] = [a[end], b[end]];
  if (aTimes === undefined || bTimes === undefined || !a.timed || !b.timed)
    return `${aTimes === undefined ? a.id : b.id} was not timed`;
  const classes = [first.environment.class, second.environment.class];
  if (classes[0] !== classes[1])
    return `timed on machines of different classes: ${classes.join(' and ')}`;
  if (a.timed.pacer !== b.timed.pacer)
    return `timed with different pacers: ${a.timed.pacer} and ${b.timed.pacer}`;
  if (a.timed.symbol_count !== b.timed.symbol_count)
    return `timed on different data: ${a.timed.symbol_count} and ${b.timed.symbol_count} symbols`;
  const samples = (times: typeof aTimes) => ({
    seconds: times.seconds,
    pacerSeconds: times.pacer_seconds,
    unsteady: times.unsteady === true,
  });
  return compareSpeeds(samples(aTimes), samples(bTimes));
}
