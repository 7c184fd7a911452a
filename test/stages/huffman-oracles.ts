/**
 * Slow, plain second computations that prefix codes are held against. None shares code or method
 * with the sources.
 */

/**
 * Σ of merged weights: take the two lightest, merge, until one is left. The total cost of any
 * minimum-redundancy code.
 */
export function sumOfMergedWeights(weights: Iterable<bigint | number>): bigint {
  const heap: bigint[] = [];
  const push = (value: bigint) => {
    let at = heap.push(value) - 1;
    while (at > 0) {
      const parent = (at - 1) >> 1;
      if (heap[parent] <= heap[at]) break;
      [heap[parent], heap[at]] = [heap[at], heap[parent]];
      at = parent;
    }
  };
  const pop = (): bigint => {
    const least = heap[0];
    const last = heap.pop()!;
    if (heap.length > 0) {
      heap[0] = last;
      for (let at = 0; ; ) {
        const left = 2 * at + 1;
        if (left >= heap.length) break;
        const child = left + 1 < heap.length && heap[left + 1] < heap[left] ? left + 1 : left;
        if (heap[at] <= heap[child]) break;
        [heap[child], heap[at]] = [heap[at], heap[child]];
        at = child;
      }
    }
    return least;
  };
  for (const weight of weights) push(BigInt(weight));
  let total = 0n;
  while (heap.length > 1) {
    const merged = pop() + pop();
    total += merged;
    push(merged);
  }
  return total;
}

/**
 * Least Σ w·l over every choice of lengths 1 … maxBits with Kraft sum at most 1, by trying them
 * all.
 */
export function exhaustiveTotal(weights: readonly bigint[], maxBits: number): bigint | undefined {
  let best: bigint | undefined;
  const unit = 2 ** maxBits;
  const choose = (i: number, used: number, total: bigint) => {
    if (best !== undefined && total >= best) return;
    if (i === weights.length) {
      best = total;
      return;
    }
    for (let length = 1; length <= maxBits; length++) {
      const share = unit / 2 ** length;
      if (used + share <= unit) choose(i + 1, used + share, total + weights[i] * BigInt(length));
    }
  };
  choose(0, 0, 0n);
  return best;
}

/**
 * The same for dozens of weights: level by level from the root, the heaviest first, over (words
 * placed, nodes open); each level costs one bit for every symbol not yet placed above it.
 */
export function levelwiseTotal(weights: readonly bigint[], maxBits: number): bigint | undefined {
  const sorted = [...weights].sort((a, b) => (a < b ? 1 : a > b ? -1 : 0));
  const count = sorted.length;
  const from = new Array<bigint>(count + 1).fill(0n);
  for (let i = count - 1; i >= 0; i--) from[i] = from[i + 1] + sorted[i];
  const known = new Map<string, bigint | undefined>();
  const least = (level: number, placed: number, open: number): bigint | undefined => {
    if (placed === count) return 0n;
    if (level > maxBits || open === 0) return undefined;
    const key = `${level} ${placed} ${open}`;
    if (known.has(key)) return known.get(key);
    let best: bigint | undefined;
    for (let words = 0; words <= Math.min(open, count - placed); words++) {
      const inner = Math.min(2 * (open - words), count);
      const deeper = least(level + 1, placed + words, inner);
      if (deeper !== undefined && (best === undefined || deeper < best)) best = deeper;
    }
    const total = best === undefined ? undefined : best + from[placed];
    known.set(key, total);
    return total;
  };
  return least(1, 0, 2);
}

/** Σ w·l, exactly. */
export function totalOf(weights: ArrayLike<number>, lengths: ArrayLike<number>): bigint {
  let total = 0n;
  for (let i = 0; i < weights.length; i++)
    if (weights[i] > 0) total += BigInt(weights[i]) * BigInt(lengths[i]);
  return total;
}
