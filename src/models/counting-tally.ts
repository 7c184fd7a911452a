/**
 * Kinds of operations that tell a small device's time; sums, shifts and memory of the message itself are left out.
 *
 * Left out besides: what starts or ends a unit or a message (counts, resets, the end of a code string), the test of the loop over
 * a message's symbols, and, where tables are sent, what fitting, writing and reading them takes.
 */
export const OPERATIONS = ['multiplies', 'divides', 'tableReads', 'branches'] as const;

/** How often each operation ran; integers. A product or quotient by a power of two is a shift and not among them. */
export type Operations = Readonly<Record<(typeof OPERATIONS)[number], number>>;

/** What coding a sequence took at one end. */
export interface OperationCounts {
  readonly symbolCount: number;
  /** Over all symbols. */
  readonly total: Operations;
  /** Most that any one symbol took, for each operation by itself. */
  readonly worst: Operations;
}

type Counter = Record<(typeof OPERATIONS)[number], number>;

const none = (): Counter => ({ multiplies: 0, divides: 0, tableReads: 0, branches: 0 });

/** Counts the operations of one symbol after another: add to the public fields, then {@link close} the symbol. */
export class OperationTally {
  multiplies = 0;
  divides = 0;
  /** Elements read from the model's or the code's tables. */
  tableReads = 0;
  /** Conditions evaluated on data, tables or the coding interval, those of loops included. */
  branches = 0;
  #symbolCount = 0;
  readonly #total = none();
  readonly #worst = none();

  /** Ends a symbol. */
  close(): void {
    this.#symbolCount++;
    for (const kind of OPERATIONS) {
      this.#total[kind] += this[kind];
      if (this[kind] > this.#worst[kind]) this.#worst[kind] = this[kind];
      this[kind] = 0;
    }
  }

  /** The counts of all symbols closed so far. */
  counts(): OperationCounts {
    return {
      symbolCount: this.#symbolCount,
      total: { ...this.#total },
      worst: { ...this.#worst },
    };
  }
}

function combine(
  a: OperationCounts,
  b: OperationCounts,
  worstOf: (a: number, b: number) => number,
): Pick<OperationCounts, 'total' | 'worst'> {
  const total = none();
  const worst = none();
  for (const kind of OPERATIONS) {
    total[kind] = a.total[kind] + b.total[kind];
    worst[kind] = worstOf(a.worst[kind], b.worst[kind]);
  }
  return { total, worst };
}

/** Counts over several sequences together. */
export function addCounts(a: OperationCounts, b: OperationCounts): OperationCounts {
  return { symbolCount: a.symbolCount + b.symbolCount, ...combine(a, b, Math.max) };
}

/**
 * Counts over the same symbols, which go through `a` and through `b`. The worst are added: a bound, which no symbol
 * need reach.
 */
export function addSteps(a: OperationCounts, b: OperationCounts): OperationCounts {
  return { symbolCount: a.symbolCount, ...combine(a, b, (first, second) => first + second) };
}

/** `symbolCount` symbols that each take `each`. */
export function evenCounts(symbolCount: number, each: Partial<Operations>): OperationCounts {
  const total = none();
  const worst = none();
  for (const kind of OPERATIONS) {
    total[kind] = symbolCount * (each[kind] ?? 0);
    if (symbolCount > 0) worst[kind] = each[kind] ?? 0;
  }
  return { symbolCount, total, worst };
}
