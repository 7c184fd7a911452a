import type { CurveLine, CurvePoint } from './curve-points.ts';
import type { Curve } from './curves.ts';

/** A doubling of the training data gains too little where it lowers the rate by less than this share of it. */
export const LEAST_GAIN = 0.01;

/** What more training data gain. */
export interface TrainingReturn {
  /**
   * The least share beyond which every further step of the curve gains less than {@link LEAST_GAIN} of the rate a doubling;
   * undefined where the last step still gains more.
   */
  readonly enough?: number;
  /** Share of the rate that a doubling gains in the last step; negative where the rate rises. */
  readonly lastGain: number;
}

/**
 * The point of diminishing return of a line over `train_share`. Between neighbours a < b the gain of a doubling is
 * (rate(a) − rate(b)) ÷ log2(b ÷ a), a share of rate(a). Every share codes the same test messages, so that chance moves the
 * rates of two shares together: the interval of either rate would hide gains that are real, and is not asked.
 */
export function trainingReturn({ points }: CurveLine): TrainingReturn {
  const gains = points.slice(1).map((next, i) => {
    const { x, rate } = points[i];
    return (rate - next.rate) / Math.log2(next.x / x) / rate;
  });
  const lastLarge = gains.findLastIndex((gain) => gain >= LEAST_GAIN);
  const enough = points[lastLarge + 1];
  return {
    ...(lastLarge === gains.length - 1 ? {} : { enough: enough.x }),
    lastGain: gains[gains.length - 1],
  };
}

/** Where an adaptive coder overtakes its shipped tables as messages grow. */
export type Crossing =
  | { readonly kind: 'never' }
  | { readonly kind: 'always' }
  | {
      readonly kind: 'between';
      /** The largest size at which shipped tables need less, and the next. */
      readonly from: number;
      readonly to: number;
      /** Where the two rates would be equal, on a line between the sizes' logarithms. */
      readonly about: number;
    };

/**
 * The size from which on one line needs no more than another, at the x that both have; undefined where those are fewer than
 * two. Where they cross more than once, the last time counts: beyond it the first stays ahead.
 */
export function crossingOf(overtaking: CurveLine, overtaken: CurveLine): Crossing | undefined {
  const common = overtaking.points.flatMap((own): { x: number; over: number }[] => {
    const other = overtaken.points.find(({ x }) => x === own.x);
    return other === undefined ? [] : [{ x: own.x, over: own.rate - other.rate }];
  });
  if (common.length < 2) return undefined;
  const last = common.findLastIndex(({ over }) => over > 0);
  if (last === common.length - 1) return { kind: 'never' };
  if (last < 0) return { kind: 'always' };
  const [before, after] = [common[last], common[last + 1]];
  const part = before.over / (before.over - after.over);
  const about = before.x * (after.x / before.x) ** part;
  return { kind: 'between', from: before.x, to: after.x, about };
}

/** An adaptive line and that of the same candidate's shipped tables, both decodable message by message. */
export interface AdaptivePair {
  readonly adaptive: CurveLine;
  readonly shipped: CurveLine;
}

/** The candidates of a curve over message sizes that have both learned and shipped tables, under reset message. */
export function adaptivePairs({ lines }: Curve): AdaptivePair[] {
  return lines
    .filter(({ tables, reset }) => tables === 'learned' && reset === 'message')
    .flatMap((adaptive) => {
      const shipped = lines.find(
        (line) => line.candidate === adaptive.candidate && line.tables === 'shipped',
      );
      return shipped === undefined ? [] : [{ adaptive, shipped }];
    });
}

/** The point of least rate; the first of several. */
export function leastPoint({ points }: CurveLine): CurvePoint {
  return points.reduce((least, point) => (point.rate < least.rate ? point : least));
}
