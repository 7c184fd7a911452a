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
  // Totals and worst by kind, one field each: looked up by name they would take most of a counting pass.
  #multiplies = 0;
  #divides = 0;
  #tableReads = 0;
  #branches = 0;
  #worstMultiplies = 0;
  #worstDivides = 0;
  #worstTableReads = 0;
  #worstBranches = 0;

  /** Ends a symbol. */
  close(): void {
    this.#symbolCount++;
    this.#multiplies += this.multiplies;
    this.#divides += this.divides;
    this.#tableReads += this.tableReads;
    this.#branches += this.branches;
    if (this.multiplies > this.#worstMultiplies) this.#worstMultiplies = this.multiplies;
    if (this.divides > this.#worstDivides) this.#worstDivides = this.divides;
    if (this.tableReads > this.#worstTableReads) this.#worstTableReads = this.tableReads;
    if (this.branches > this.#worstBranches) this.#worstBranches = this.branches;
    this.multiplies = 0;
    this.divides = 0;
    this.tableReads = 0;
    this.branches = 0;
  }

  /** The counts of all symbols closed so far. */
  counts(): OperationCounts {
    return {
      symbolCount: this.#symbolCount,
      total: {
        multiplies: this.#multiplies,
        divides: this.#divides,
        tableReads: this.#tableReads,
        branches: this.#branches,
      },
      worst: {
        multiplies: this.#worstMultiplies,
        divides: this.#worstDivides,
        tableReads: this.#worstTableReads,
        branches: this.#worstBranches,
      },
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
