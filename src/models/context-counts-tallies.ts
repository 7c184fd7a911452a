/**
 * How often each count occurs: `times[i]` things were seen `values[i]` times. All that plug-in, Miller–Madow and other
 * estimators by counts need, in far less room than the counts.
 */
export interface Tallies {
  /** Rising, ≥ 1. */
  readonly values: Uint32Array;
  /** ≥ 1. */
  readonly times: Uint32Array;
  /** Σ times: how many things were seen. */
  readonly distinct: number;
  /** Σ values · times: how often anything was seen. */
  readonly total: number;
}

const SMALL = 4096;

/** Gathers counts one by one. */
export class TallyBuilder {
  readonly #small = new Uint32Array(SMALL);
  readonly #large = new Map<number, number>();

  /** Notes something seen `count` times; 0 is not noted. */
  add(count: number): void {
    if (count < SMALL) this.#small[count]++;
    else this.#large.set(count, (this.#large.get(count) ?? 0) + 1);
  }

  finish(): Tallies {
    const pairs: [number, number][] = [];
    for (let count = 1; count < SMALL; count++) {
      if (this.#small[count] > 0) pairs.push([count, this.#small[count]]);
    }
    pairs.push(...[...this.#large].sort((a, b) => a[0] - b[0]));
    let distinct = 0;
    let total = 0;
    for (const [count, times] of pairs) {
      distinct += times;
      total += count * times;
    }
    return {
      values: Uint32Array.from(pairs, (pair) => pair[0]),
      times: Uint32Array.from(pairs, (pair) => pair[1]),
      distinct,
      total,
    };
  }
}

/** Tallies of a list of counts. */
export function talliesOf(counts: Iterable<number>): Tallies {
  const builder = new TallyBuilder();
  for (const count of counts) builder.add(count);
  return builder.finish();
}

const log2Table = new Float64Array(1 << 16);
for (let i = 1; i < log2Table.length; i++) log2Table[i] = Math.log2(i);

/** log2 of a count ≥ 1, by table where it is small. For estimates only, never on a coding path. */
export function log2OfCount(count: number): number {
  return count < log2Table.length ? log2Table[count] : Math.log2(count);
}

/** Σ c · log2 c over all counts. Equal tallies give equal sums. */
export function sumOfLogs(tallies: Tallies): number {
  let sum = 0;
  for (let i = 0; i < tallies.values.length; i++) {
    sum += tallies.values[i] * tallies.times[i] * log2OfCount(tallies.values[i]);
  }
  return sum;
}
