/** The weight is looked for in steps of this. */
const FIRST_STEP = 0.5;
/** Weights below e^−this of the largest are left out. */
const DEPTH = 42;
const MOST_POINTS = 2 ** 13;

/**
 * ∫ value(t) e^weight(t) dt ÷ ∫ e^weight(t) dt over `from` … `to`.
 *
 * The weight may be so steep that its peak falls between any two fixed points, so the peak is first found, then the stretch
 * around it that counts; there the trapezoid rule, which converges exponentially for a smooth function that vanishes at
 * both ends, is refined until the result stands still.
 * @param logWeight  smooth with a single peak
 */
export function integrateWeighted(
  logWeight: (t: number) => number,
  value: (t: number) => number,
  from: number,
  to: number,
): number {
  const peak = findPeak(logWeight, from, to);
  const most = logWeight(peak);
  const counts = (t: number): boolean => logWeight(t) > most - DEPTH;
  const left = edge(counts, peak, from);
  const right = edge(counts, peak, to);
  let result = Number.NaN;
  let points = 64;
  let { weightSum, valueSum } = sumAt(0);
  for (;;) {
    const before = result;
    result = valueSum / weightSum;
    if (Math.abs(result - before) <= 1e-13 * Math.abs(result) || points >= MOST_POINTS) {
      return result;
    }
    // The points half-way between those summed so far.
    const between = sumAt(0.5);
    weightSum += between.weightSum;
    valueSum += between.valueSum;
    points *= 2;
  }

  function sumAt(offset: number): { weightSum: number; valueSum: number } {
    const step = (right - left) / points;
    const sums = { weightSum: 0, valueSum: 0 };
    for (let i = offset; i <= points; i++) {
      const t = left + i * step;
      const weight = Math.exp(logWeight(t) - most);
      sums.weightSum += weight;
      sums.valueSum += weight * value(t);
    }
    return sums;
  }
}

function findPeak(f: (t: number) => number, from: number, to: number): number {
  let best = from;
  let bestValue = Number.NEGATIVE_INFINITY;
  for (let t = from; t <= to; t += FIRST_STEP) {
    const value = f(t);
    if (value > bestValue) {
      best = t;
      bestValue = value;
    }
  }
  // Golden section between the neighbours of the best point.
  const share = (Math.sqrt(5) - 1) / 2;
  let low = Math.max(from, best - FIRST_STEP);
  let high = Math.min(to, best + FIRST_STEP);
  let a = high - share * (high - low);
  let b = low + share * (high - low);
  let fa = f(a);
  let fb = f(b);
  for (let i = 0; i < 50; i++) {
    if (fa >= fb) {
      high = b;
      b = a;
      fb = fa;
      a = high - share * (high - low);
      fa = f(a);
    } else {
      low = a;
      a = b;
      fa = fb;
      b = low + share * (high - low);
      fb = f(b);
    }
  }
  return (low + high) / 2;
}

/** Where, from `peak` towards `end`, the weight stops to count. */
function edge(counts: (t: number) => boolean, peak: number, end: number): number {
  if (counts(end)) return end;
  let inside = peak;
  let outside = end;
  for (let i = 0; i < 40; i++) {
    const middle = (inside + outside) / 2;
    if (counts(middle)) inside = middle;
    else outside = middle;
  }
  return outside;
}
