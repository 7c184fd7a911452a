/** Kinds of operations that tell a small device's time; sums, shifts and memory of the message itself are left out. */
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

/** Counts over several sequences together. */
export function addCounts(a: OperationCounts, b: OperationCounts): OperationCounts {
  const total = none();
  const worst = none();
  for (const kind of OPERATIONS) {
    total[kind] = a.total[kind] + b.total[kind];
    worst[kind] = Math.max(a.worst[kind], b.worst[kind]);
  }
  return { symbolCount: a.symbolCount + b.symbolCount, total, worst };
}
