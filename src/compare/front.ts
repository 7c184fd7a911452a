/** One figure of every alternative, and which way is better. */
export interface Objective {
  readonly name: string;
  readonly better: 'less' | 'more';
  /** By alternative; undefined counts as worse than any. */
  readonly values: readonly (number | undefined)[];
}

export interface Front {
  /** Alternatives that none dominates, in the order given. */
  readonly members: readonly number[];
  /** For each alternative the first front member that dominates it; −1 for members. */
  readonly dominatedBy: readonly number[];
}

/**
 * The trade-off front: alternatives for which no other is at least as good in every objective and better in one. Of several that are
 * equal in all, all are members.
 * Source: V. Pareto, Manuale di economia politica, 1906; the definition as it is commonly used.
 * Cost: count² · objectives.
 */
export function tradeOffFront(count: number, objectives: readonly Objective[]): Front {
  const costs = objectives.map(({ better, values }) =>
    Float64Array.from({ length: count }, (_, i) => {
      const value = values[i];
      if (value === undefined) return Number.POSITIVE_INFINITY;
      return better === 'less' ? value : -value;
    }),
  );
  const dominates = (a: number, b: number): boolean => {
    let better = false;
    for (const cost of costs) {
      if (cost[a] > cost[b]) return false;
      if (cost[a] < cost[b]) better = true;
    }
    return better;
  };
  const members: number[] = [];
  for (let i = 0; i < count; i++) {
    let free = true;
    for (let j = 0; free && j < count; j++) free = !dominates(j, i);
    if (free) members.push(i);
  }
  return {
    members,
    dominatedBy: Array.from(
      { length: count },
      (_, i) => members.find((m) => dominates(m, i)) ?? -1,
    ),
  };
}
