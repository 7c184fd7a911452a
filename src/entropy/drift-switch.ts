import { SeededGenerator } from '../statistics/generator.ts';
import type { WindowCounts } from './drift-counts.ts';

/** Share of stationary sources for which one test may see a change. Two orders are tested, so 2 in 1000 in all. */
const LEVEL = 0.001;
/** Reorderings drawn; with the order found, the least share that can come out is 1 ÷ 2000. */
const REORDERINGS = 1999;
/** Fewest windows for which a share below the level can come out at all. */
export const FEWEST_WINDOWS = 16;
/** Windows at either end within which no boundary is sought: their score is mostly noise. */
const MARGIN = 3;

/** What the comparison of window orders gave. */
export interface SwitchTest {
  /** The windows differ more, from one side of some boundary to the other, than nearly all of their reorderings do. */
  readonly found: boolean;
  /** Share of reorderings, the order found counted among them, that part as well or better. */
  readonly share: number;
  /** The boundary that parts best: windows before it. */
  readonly boundary: number;
}

/**
 * Whether the windows of a sequence change at some boundary, by reordering them at random: where nothing changes with time,
 * every order of the windows is about as likely as the one found, whatever the source, as long as windows are far longer
 * than what the source remembers.
 *
 * For each boundary the two sides are held against one another by a score: the squared distance of their counts from what
 * the frequencies of all windows expect, each pair weighed by 1 ÷ its count (a Pearson statistic with context totals
 * given). Scores of one boundary are standardised over all orders drawn, and each order counts with its best boundary. A
 * change within the first or last three windows of 64 cannot be told from chance this way.
 *
 * Cost: pairs · windows² ÷ 2 for the products of windows, then windows² ÷ 2 a reordering.
 * Source: E. S. Edgington, P. Onghena, "Randomization Tests", 4th ed. 2007 (from memory); the score is K. Pearson's, 1900.
 */
export function testSwitch(counts: WindowCounts, seed: number | string): SwitchTest {
  return testProducts(windowProducts(counts), counts.windows, seed);
}

/** The same for both sides of a boundary, each by itself; undefined for a side with too few windows. */
export function testSides(
  counts: WindowCounts,
  boundary: number,
  seed: number | string,
): (SwitchTest | undefined)[] {
  const products = windowProducts(counts);
  const { windows } = counts;
  return [
    [0, boundary],
    [boundary, windows],
  ].map(([from, to]) => {
    if (to - from < FEWEST_WINDOWS) return undefined;
    return testProducts(centredPart(products, windows, from, to), to - from, `${seed}/${from}`);
  });
}

/** Products of the windows' scaled deviations from what is expected of them; shape [windows × windows]. */
function windowProducts(counts: WindowCounts): Float64Array {
  const { windows, pairCounts, contextCounts, contextOf } = counts;
  const contextTotals = new Float64Array(counts.contexts);
  for (let c = 0; c < counts.contexts; c++) {
    for (let w = 0; w < windows; w++) contextTotals[c] += contextCounts[c * windows + w];
  }
  const products = new Float64Array(windows * windows);
  const deviations = new Float64Array(windows);
  for (let p = 0; p < counts.pairs; p++) {
    let total = 0;
    for (let w = 0; w < windows; w++) total += pairCounts[p * windows + w];
    const context = contextOf[p];
    const share = total / contextTotals[context];
    // A pair that its context determines deviates nowhere.
    if (share === 1) continue;
    const scale = 1 / Math.sqrt(total);
    for (let w = 0; w < windows; w++) {
      const expected = share * contextCounts[context * windows + w];
      deviations[w] = (pairCounts[p * windows + w] - expected) * scale;
    }
    for (let u = 0; u < windows; u++) {
      const row = u * windows;
      const own = deviations[u];
      for (let v = 0; v <= u; v++) products[row + v] += own * deviations[v];
    }
  }
  for (let u = 0; u < windows; u++) {
    for (let v = 0; v < u; v++) products[v * windows + u] = products[u * windows + v];
  }
  return products;
}

/** The products of some windows among themselves, as deviations from their own mean. */
function centredPart(
  products: Float64Array,
  windows: number,
  from: number,
  to: number,
): Float64Array {
  const size = to - from;
  const means = new Float64Array(size);
  let mean = 0;
  for (let u = 0; u < size; u++) {
    for (let v = 0; v < size; v++) means[u] += products[(from + u) * windows + from + v] / size;
    mean += means[u] / size;
  }
  const part = new Float64Array(size * size);
  for (let u = 0; u < size; u++) {
    for (let v = 0; v < size; v++) {
      const product = products[(from + u) * windows + from + v];
      part[u * size + v] = product - means[u] - means[v] + mean;
    }
  }
  return part;
}

function testProducts(products: Float64Array, windows: number, seed: number | string): SwitchTest {
  const boundaries = windows - 1;
  const generator = new SeededGenerator(seed);
  const order = Uint32Array.from({ length: windows }, (_, w) => w);
  const scores = new Float64Array((REORDERINGS + 1) * boundaries);
  scoreBoundaries(products, windows, order, scores, 0);
  const boundary = bestBoundary(scores, windows);
  for (let r = 1; r <= REORDERINGS; r++) {
    for (let w = windows - 1; w > 0; w--) {
      const other = generator.integer(0, w);
      const moved = order[w];
      order[w] = order[other];
      order[other] = moved;
    }
    scoreBoundaries(products, windows, order, scores, r * boundaries);
  }
  standardise(scores, boundaries);
  const best = bestOf(scores, boundaries, 0);
  let asGood = 0;
  for (let r = 0; r <= REORDERINGS; r++) {
    if (bestOf(scores, boundaries, r) >= best) asGood++;
  }
  const share = asGood / (REORDERINGS + 1);
  return { found: share <= LEVEL, share, boundary };
}

/** Score of every boundary of one order of the windows; only boundaries of the same place are to be compared. */
function scoreBoundaries(
  products: Float64Array,
  windows: number,
  order: Uint32Array,
  scores: Float64Array,
  at: number,
): void {
  let score = 0;
  for (let j = 0; j < windows - 1; j++) {
    const row = order[j] * windows;
    let cross = 0;
    for (let i = 0; i < j; i++) cross += products[row + order[i]];
    score += 2 * cross + products[row + order[j]];
    scores[at + j] = score;
  }
}

/** Each boundary's scores less their mean, in standard deviations; 0 where they are all the same. */
function standardise(scores: Float64Array, boundaries: number): void {
  const rows = scores.length / boundaries;
  for (let j = 0; j < boundaries; j++) {
    let mean = 0;
    for (let r = 0; r < rows; r++) mean += scores[r * boundaries + j] / rows;
    let squares = 0;
    for (let r = 0; r < rows; r++) squares += (scores[r * boundaries + j] - mean) ** 2;
    const deviation = Math.sqrt(squares / rows);
    for (let r = 0; r < rows; r++) {
      const at = r * boundaries + j;
      scores[at] = deviation === 0 ? 0 : (scores[at] - mean) / deviation;
    }
  }
}

function bestOf(scores: Float64Array, boundaries: number, row: number): number {
  let best = Number.NEGATIVE_INFINITY;
  for (let j = 0; j < boundaries; j++) best = Math.max(best, scores[row * boundaries + j]);
  return best;
}

/** Where the windows as they lie part best: the score, by the sizes of both sides what a likelihood ratio gains. */
function bestBoundary(scores: Float64Array, windows: number): number {
  let best = Number.NEGATIVE_INFINITY;
  let boundary = MARGIN;
  for (let before = MARGIN; before <= windows - MARGIN; before++) {
    const weighed = scores[before - 1] / (before * (windows - before));
    if (weighed > best) {
      best = weighed;
      boundary = before;
    }
  }
  return boundary;
}
