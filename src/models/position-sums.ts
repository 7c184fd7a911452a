import type { MemoryBound } from './memory-bound.ts';
import type { Halving } from './symbol-runs.ts';
import { SymbolSums } from './symbol-sums.ts';

/** Upper bound of the bytes that a symbol of the alphabet takes, marked counts included. */
const BYTES_A_SYMBOL = 33;

/**
 * Counts of the empty context at each position of a record, made when a position is first met.
 *
 * Memory: up to 33 bytes for each symbol of the alphabet and position met.
 */
export class PositionSums {
  readonly #alphabetSize: number;
  readonly #halving: Halving;
  readonly #memory: MemoryBound;
  readonly #sums: (SymbolSums | undefined)[];
  /** Positions met since the last mark or restore. */
  readonly #met: Uint32Array;
  readonly #isMet: Uint8Array;
  #metCount = 0;
  #isMarked = false;

  /** @param positions  N ≥ 1 */
  constructor(alphabetSize: number, positions: number, halving: Halving, memory: MemoryBound) {
    this.#alphabetSize = alphabetSize;
    this.#halving = halving;
    this.#memory = memory;
    this.#sums = new Array(positions).fill(undefined);
    this.#met = new Uint32Array(positions);
    this.#isMet = new Uint8Array(positions);
  }

  /** A copy that shares nothing and is not marked. */
  clone(memory: MemoryBound): PositionSums {
    const copy = new PositionSums(this.#alphabetSize, this.#sums.length, this.#halving, memory);
    this.#sums.forEach((sums, position) => {
      if (sums === undefined) return;
      memory.claim(BYTES_A_SYMBOL * this.#alphabetSize);
      copy.#sums[position] = sums.clone();
    });
    return copy;
  }

  /** The counts at a position; ask anew after {@link restore}, so that what changes is known. */
  at(position: number): SymbolSums {
    if (this.#isMet[position] === 0) {
      this.#isMet[position] = 1;
      this.#met[this.#metCount++] = position;
    }
    return this.#sums[position] ?? this.#add(position);
  }

  /** Positions met since the beginning. */
  get count(): number {
    return this.#sums.filter((sums) => sums !== undefined).length;
  }

  /** Makes the present counts the ones that {@link restore} returns to. */
  mark(): void {
    for (const sums of this.#sums) sums?.mark();
    this.#isMarked = true;
    this.#forgetMet();
  }

  /** Back to the marked counts; cost by what changed since. */
  restore(): void {
    for (let i = 0; i < this.#metCount; i++) this.#sums[this.#met[i]]!.restore();
    this.#forgetMet();
  }

  #add(position: number): SymbolSums {
    this.#memory.claim(BYTES_A_SYMBOL * this.#alphabetSize);
    const sums = new SymbolSums(this.#alphabetSize, this.#halving);
    // What is met after the mark was empty when marked.
    if (this.#isMarked) sums.mark();
    this.#sums[position] = sums;
    return sums;
  }

  #forgetMet(): void {
    for (let i = 0; i < this.#metCount; i++) this.#isMet[this.#met[i]] = 0;
    this.#metCount = 0;
  }
}
